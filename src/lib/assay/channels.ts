/** The channels that are read: which columns or peaks, of which species, in which unit. */
import type { ColumnMapping, PeakMapping, ValueUnit } from '$lib/schemas/sheet';
import type { ColumnHeader } from './columns';
import { askCommonUnits } from './common-unit';
import type { Examination } from './examination';
import { settleDoubles } from './quantity-rules';
import type { ReplicateKind } from './replicate-columns';
import { askPeak, askSpecies } from './species-rules';
import { askUnit, asUnit } from './value-unit';

/** One series of values of the run to be. */
export interface Channel {
	id: string;
	weights: Record<string, number>;
	unit: ValueUnit | null;
	/** Column of the values; in the long layout the value column, with the peak's name. */
	column: number;
	peak?: string;
	/** Further columns that are replicates of the same channel, and of what. */
	replicates: number[];
	replicateKind: ReplicateKind;
	loq: number | null;
	lod: number | null;
	responseFactor: number | null;
	fitResponse: boolean;
	label: string;
	/** "column E", or "row 5" where times run across. */
	place: string;
	mapping: ColumnMapping | PeakMapping;
}

/** How a message names a channel: "A (column E)". */
export const channelName = (c: Channel): string =>
	c.peak === undefined ? `${c.label} (${c.place})` : `${c.label} (peak "${c.peak}")`;

/** Part of a finding's id: the column or the peak, which other answers do not change. */
export const channelKey = (c: Channel): string =>
	c.peak === undefined ? c.place.replace(/^column /, '').replace(' ', '-') : `peak-${c.peak}`.slice(0, 120);

/** Where a question about the whole column points: its header cell. */
export function headerCell(ex: Examination, column: number): string {
	const rows = ex.mapping.headerRows;
	return ex.at(rows.length > 0 ? rows[rows.length - 1] : ex.mapping.block.firstRow, column);
}

export function settleChannels(ex: Examination, headers: Map<number, ColumnHeader>): Channel[] {
	return ex.mapping.layout === 'long' ? peakChannels(ex, headers) : wideChannels(ex, headers);
}

function wideChannels(ex: Examination, headers: Map<number, ColumnHeader>): Channel[] {
	const columns = ex.mapping.columns.filter((c) => c.role === 'species');
	for (const c of columns) if (!hasSpecies(c.weights)) askSpecies(ex, c, headers.get(c.column)?.header ?? '');
	const matched = columns.filter((c) => c.role === 'species' && hasSpecies(c.weights));
	const replicates = settleDoubles(ex, matched, headers);
	const used = matched.filter((c) => c.role === 'species' && !replicates.absorbed.has(c.column));
	const open = askCommonUnits(ex, used, headers);
	const ids = new Set<string>();
	return used.map((c) => {
		if (!open.has(c.column)) askUnit(ex, c, headers.get(c.column), headerCell(ex, c.column));
		return {
			...channelOf(ex, c, c.column, uniqueId(c.weights ?? {}, ids)),
			replicates: replicates.of.get(c.column)?.columns ?? [],
			replicateKind: replicates.of.get(c.column)?.kind ?? 'samples'
		};
	});
}

function channelOf(ex: Examination, c: ColumnMapping, column: number, id: string): Channel {
	return {
		id,
		weights: c.weights ?? {},
		unit: asUnit(c.unit),
		column,
		replicates: [],
		replicateKind: 'samples',
		loq: c.loq ?? null,
		lod: c.lod ?? null,
		responseFactor: c.responseFactor ?? null,
		fitResponse: c.fitResponse ?? false,
		label: nameOf(c.weights ?? {}),
		place: ex.places.series(column),
		mapping: c
	};
}

const hasSpecies = (weights: Record<string, number> | undefined) => Object.keys(weights ?? {}).length > 0;

export const nameOf = (weights: Record<string, number>): string => Object.keys(weights).join(' + ');

function uniqueId(weights: Record<string, number>, taken: Set<string>): string {
	const base = Object.keys(weights).join('_').slice(0, 34) || 'channel';
	let id = base;
	for (let n = 2; taken.has(id); n++) id = `${base}-${n}`;
	taken.add(id);
	return id;
}

function peakChannels(ex: Examination, headers: Map<number, ColumnHeader>): Channel[] {
	const value = ex.mapping.columns.find((c) => c.role === 'value');
	const peakColumn = ex.mapping.columns.find((c) => c.role === 'peak');
	if (!value || !peakColumn) return [];
	askUnit(ex, value, headers.get(value.column), headerCell(ex, value.column));
	const ids = new Set<string>();
	const channels: Channel[] = [];
	for (const peak of ex.mapping.peaks ?? []) {
		if (peak.ignore) continue;
		if (!hasSpecies(peak.weights)) askPeak(ex, peak, peakColumn.column);
		if (peak.ignore || !hasSpecies(peak.weights)) continue;
		const base: ColumnMapping = { column: value.column, role: 'species', unit: value.unit, ...pick(peak) };
		channels.push({
			...channelOf(ex, base, value.column, uniqueId(peak.weights ?? {}, ids)),
			peak: peak.peak,
			mapping: peak
		});
	}
	return channels;
}

const pick = ({ weights, responseFactor, fitResponse, loq, lod }: PeakMapping) => ({
	weights,
	responseFactor,
	fitResponse,
	loq,
	lod
});
