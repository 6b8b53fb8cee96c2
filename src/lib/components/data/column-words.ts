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

/** What the chip of a column says after its letter: "elapsed time, h" or "A, mmol/L". */
export function columnWords(column: ColumnMapping): string {
	const what = column.role === 'species' ? speciesWords(column.weights) : ROLE_WORDS[column.role];
	const unit = column.unit ? unitText(column.unit) : UNIT_ROLES.includes(column.role) ? 'unit not known' : '';
	return unit ? `${what}, ${unit}` : what;
}

/** Whether a column still lacks what it needs. */
export function isIncomplete(column: ColumnMapping): boolean {
	if (column.role === 'species' && Object.keys(column.weights ?? {}).length === 0) return true;
	return ['species', 'value'].includes(column.role) && column.unit === null;
}

export const usedColumns = (mapping: Mapping): ColumnMapping[] =>
	mapping.columns.filter((c) => c.role !== 'ignore');
