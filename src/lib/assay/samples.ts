/** Rows as samples: which cells belong to one time, in the wide layout (a row a sample) and the long one (a row a peak). */
import type { Channel } from './channels';
import type { Examination } from './examination';

export interface CellPlace {
	row: number;
	column: number;
}

export interface Sample {
	/** First row of the sample on the sheet. */
	row: number;
	time: CellPlace;
	sampleId?: string;
	/** Number or name of the injection, where a column says so. */
	injection?: string;
	/** Cell of each channel's value. */
	cells: Map<string, CellPlace>;
	/** Which of several replicate columns this is; 0 for the first. */
	replicate: number;
}

export function timeColumn(ex: Examination): number {
	return ex.mapping.columns.find((c) => c.role === 'time')?.column ?? 0;
}

export function samplesOf(ex: Examination, rows: number[], channels: Channel[]): Sample[] {
	return ex.mapping.layout === 'long' ? longSamples(ex, rows, channels) : wideSamples(ex, rows, channels);
}

const columnOfRole = (ex: Examination, role: string) =>
	ex.mapping.columns.find((c) => c.role === role)?.column;

function idOf(ex: Examination, row: number, column: number | undefined): string | undefined {
	if (column === undefined) return undefined;
	const cell = ex.view.mergedCell(row, column);
	const text = cell
		? String(cell[1] ?? '')
				.trim()
				.slice(0, 60)
		: '';
	return text || undefined;
}

function wideSamples(ex: Examination, rows: number[], channels: Channel[]): Sample[] {
	const time = timeColumn(ex);
	const sample = columnOfRole(ex, 'sample');
	const injection = columnOfRole(ex, 'injection');
	const most = Math.max(0, ...channels.map((c) => c.replicates.length));
	const samples: Sample[] = [];
	for (const row of rows) {
		for (let k = 0; k <= most; k++) {
			const cells = new Map<string, CellPlace>();
			for (const c of channels) {
				const column = k === 0 ? c.column : c.replicates[k - 1];
				if (column !== undefined) cells.set(c.id, { row, column });
			}
			samples.push({
				row,
				time: { row, column: time },
				sampleId: idOf(ex, row, sample),
				injection: idOf(ex, row, injection),
				cells,
				replicate: k
			});
		}
	}
	return samples;
}

/** A sample of the long layout ends where its time, its sample name or injection changes, or a peak comes again. */
function longSamples(ex: Examination, rows: number[], channels: Channel[]): Sample[] {
	const time = timeColumn(ex);
	const sample = columnOfRole(ex, 'sample');
	const injection = columnOfRole(ex, 'injection');
	const peakColumn = columnOfRole(ex, 'peak') ?? 0;
	const byPeak = new Map(channels.map((c) => [c.peak, c]));
	const samples: Sample[] = [];
	let seen = new Set<string>();
	let carried = {
		time: '',
		row: 0,
		sampleId: undefined as string | undefined,
		injection: undefined as string | undefined
	};
	for (const row of rows) {
		const peak = ex.shown(row, peakColumn);
		const own = {
			time: ex.shown(row, time),
			sampleId: idOf(ex, row, sample),
			injection: idOf(ex, row, injection)
		};
		// A blank time is that of the row above only within one sample.
		const another = own.sampleId !== undefined && own.sampleId !== carried.sampleId;
		const blank = own.time === '' && !another;
		const next = {
			time: blank ? carried.time : own.time,
			row: blank ? carried.row : row,
			sampleId: own.sampleId ?? (blank ? carried.sampleId : undefined),
			injection: own.injection ?? (blank ? carried.injection : undefined)
		};
		const changed =
			next.time !== carried.time ||
			next.sampleId !== carried.sampleId ||
			next.injection !== carried.injection;
		if (samples.length === 0 || changed || seen.has(peak)) {
			samples.push({
				row,
				time: { row: next.row || row, column: time },
				sampleId: next.sampleId,
				injection: next.injection,
				cells: new Map(),
				replicate: 0
			});
			seen = new Set();
		}
		seen.add(peak);
		carried = next;
		const channel = byPeak.get(peak);
		const value = ex.mapping.columns.find((c) => c.role === 'value')?.column ?? 0;
		if (channel) samples[samples.length - 1].cells.set(channel.id, { row, column: value });
	}
	return samples;
}

export interface Timed {
	sample: Sample;
	/** Elapsed seconds, or null while a finding on the cell is open. */
	seconds: number | null;
	/** Elapsed time as written, where the column holds plain numbers in the run's unit. */
	plain: number | null;
}
