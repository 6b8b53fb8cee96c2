import type { TimeForm } from '$lib/assay';
import { unitText } from '$lib/client/numbers';
import type { ColumnMapping, ColumnRole, Mapping } from '$lib/schemas/sheet';
import { seriesOf } from './mapped-series';

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

/**
 * What the chip of a column says after its letter: "elapsed time, h" or "A, mmol/L". `form` is how times carry their unit in the
 * cells: a column of stored durations has no unit of its own, and nothing about it is open.
 */
export function columnWords(column: ColumnMapping, form: TimeForm | null = null): string {
	const what = column.role === 'species' ? speciesWords(column.weights) : ROLE_WORDS[column.role];
	if (column.role === 'time' && form) return `${what}, ${form}`;
	if (column.unit) return `${what}, ${unitText(column.unit)}`;
	return UNIT_ROLES.includes(column.role) ? `${what}, unit not known` : what;
}

/** Whether a column still lacks what it needs. */
export function isIncomplete(column: ColumnMapping): boolean {
	if (column.role === 'species' && Object.keys(column.weights ?? {}).length === 0) return true;
	return ['species', 'value'].includes(column.role) && column.unit === null;
}

export const usedColumns = (mapping: Mapping): ColumnMapping[] =>
	seriesOf(mapping).filter((c) => c.role !== 'ignore');

export const unusedColumns = (mapping: Mapping): ColumnMapping[] =>
	seriesOf(mapping).filter((c) => c.role === 'ignore');
