import type { SheetView } from '$lib/assay';
import { unitText } from '$lib/client/numbers';
import type { ColumnMapping, ColumnRole, Mapping } from '$lib/schemas/sheet';

export const ROLE_WORDS: Record<ColumnRole, string> = {
	time: 'elapsed time',
	species: 'species',
	temperature: 'temperature log',
	sample: 'sample name',
	injection: 'injection number',
	'internal standard': 'internal standard',
	peak: 'peak name',
	value: 'value of the peak',
	ignore: 'not used'
};

export const UNIT_ROLES: readonly ColumnRole[] = ['time', 'species', 'value', 'temperature', 'internal standard'];

/** "A", "A + B", or that nobody has said yet. */
export function speciesWords(weights: Record<string, number> | undefined): string {
	const ids = Object.keys(weights ?? {});
	return ids.length ? ids.join(' + ') : 'species not chosen';
}

/** What the chip of a column says after its letter: "elapsed time, h" or "A, mmol/L". `clock`: times as h:mm. */
export function columnWords(column: ColumnMapping, clock = false): string {
	const what = column.role === 'species' ? speciesWords(column.weights) : ROLE_WORDS[column.role];
	if (column.unit) return `${what}, ${unitText(column.unit)}`;
	if (column.role === 'time' && clock) return `${what}, h:mm`;
	return UNIT_ROLES.includes(column.role) ? `${what}, unit not known` : what;
}

const CLOCK_KINDS = ['time', 'duration', 'datetime', 'date'];

/** Whether the times of a table are durations or clock times, which carry their unit in the cells. */
export function isClock(view: SheetView, mapping: Mapping): boolean {
	const column = mapping.columns.find((c) => c.role === 'time')?.column;
	if (column === undefined) return false;
	const { firstRow } = mapping.block;
	return [0, 1, 2].some((i) => {
		const value = view.cell(firstRow + i, column)?.[1];
		const { kind } = view.style(firstRow + i, column);
		return CLOCK_KINDS.includes(kind) || (typeof value === 'string' && /^\d+:\d\d/.test(value));
	});
}

/** Whether a column still lacks what it needs. */
export function isIncomplete(column: ColumnMapping): boolean {
	if (column.role === 'species' && Object.keys(column.weights ?? {}).length === 0) return true;
	return ['species', 'value'].includes(column.role) && column.unit === null;
}

export const usedColumns = (mapping: Mapping): ColumnMapping[] =>
	mapping.columns.filter((c) => c.role !== 'ignore');
