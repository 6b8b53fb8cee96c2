import { address } from '$lib/assay/grid';
import type { AssayValue } from '$lib/schemas/run';
import { SHEETS } from '../layout';
import type { ReceivedFile, UsedRun } from '../input';
import type { SheetWriter } from '../sheet-writer';

/** Index of the source files; each of their sheets follows as one of its own, cell for cell at the same address. */
export function writeReceived(
	sheet: SheetWriter,
	files: ReceivedFile[],
	add: (name: string) => SheetWriter
): void {
	sheet.heading(1, SHEETS.received);
	sheet.note(
		2,
		'The values of each source file as received. Text stays text, whatever it begins with; formulas show the value that the file stored.'
	);
	sheet.header(4, ['File', 'SHA-256', 'Bytes', 'Received (UTC)', 'Sheet of the file', 'Stands on', 'Note']);
	let row = 5;
	let count = 0;
	for (const file of files) {
		const base = [file.fileName, file.sha256, file.size, file.receivedAt.toISOString()];
		if (!file.grid) {
			sheet.row(row++, [
				...base,
				'',
				'',
				'Not readable by this version; the checksum is that of the stored bytes.'
			]);
			continue;
		}
		for (const source of file.grid.sheets) {
			const name = `Received ${++count}`;
			const note = source.state === 'visible' ? '' : `${source.state} in the file`;
			sheet.row(row++, [...base, source.name, name, note]);
			const target = add(name);
			for (const line of source.rows) for (const cell of line.c) target.put(line.r, cell[0], cell[1]);
			target.finish();
		}
	}
	if (files.length === 0) sheet.note(row, 'The runs behind this fit were entered without a source file.');
	sheet.finish(4);
}

function cellParts(value: AssayValue): { kind: string; number: number | null } {
	if (value === null) return { kind: 'missing', number: null };
	if (typeof value === 'number') return { kind: 'value', number: value };
	return 'below' in value ? { kind: 'below', number: value.below } : { kind: 'above', number: value.above };
}

/** Every value of every run behind the fit: unit, limit, exclusion with its reason, and the cell that it came from. */
export function writeUsed(sheet: SheetWriter, runs: UsedRun[]): void {
	sheet.heading(1, SHEETS.used);
	sheet.note(
		2,
		'Conditions first, then each value with its source cell. Excluded values stay in sight with the reason.'
	);
	let row = sheet.table(
		4,
		[
			'Run',
			'Number',
			'Revision used',
			'Newest revision',
			'Source file',
			'Temperature',
			'Unit',
			'Time zero',
			'Charge'
		],
		runs.map((r) => [
			r.label,
			r.number,
			r.revision,
			r.current,
			r.fileName ?? '',
			r.content.temperature.value,
			r.content.temperature.unit,
			r.content.timeZero ?? '',
			Object.entries(r.content.initial)
				.map(([s, a]) => ('fit' in a ? `${s} fitted` : `${s} ${a.value} ${a.unit}`))
				.join(', ')
		])
	);
	row += 1;
	sheet.header(row, [
		'Run',
		'Row',
		'Time',
		'Time unit',
		'Channel',
		'Kind',
		'Value',
		'Unit',
		'Source',
		'Excluded because'
	]);
	row += 1;
	for (const run of runs) row = writeRunValues(sheet, run, row);
	writeCorrections(sheet, runs, row + 1);
	sheet.finish();
}

function writeRunValues(sheet: SheetWriter, run: UsedRun, first: number): number {
	let row = first;
	const { content } = run;
	content.timepoints.forEach((point, index) => {
		for (const channel of content.channels) {
			if (!Object.hasOwn(point.values, channel.id)) continue;
			const { kind, number } = cellParts(point.values[channel.id]);
			const excluded = (content.exclusions ?? []).find(
				(e) => e.index === index && (e.channel === null || e.channel === channel.id)
			);
			const cell = point.source?.cells?.[channel.id] ?? (point.source ? address(point.source.row, 1) : '');
			sheet.row(row++, [
				run.label,
				index + 1,
				point.time,
				content.timeUnit,
				channel.id,
				kind,
				number,
				channel.unit,
				point.source ? `${point.source.sheet}!${cell}` : '',
				excluded
					? `${excluded.reasonCode}: ${excluded.reason}${excluded.by ? ` (${excluded.by}, ${excluded.at ?? ''})` : ''}`
					: ''
			]);
		}
	});
	return row;
}

function writeCorrections(sheet: SheetWriter, runs: UsedRun[], first: number): void {
	const rows = runs.flatMap((r) =>
		(r.content.corrections ?? []).map((c) => [
			r.label,
			`${c.sheet}!${c.cell}`,
			c.original,
			c.corrected,
			c.reason,
			c.by ?? '',
			c.at ?? ''
		])
	);
	if (rows.length > 0)
		sheet.table(first, ['Run', 'Cell', 'As received', 'Corrected to', 'Reason', 'By', 'At'], rows);
}
