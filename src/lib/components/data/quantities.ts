import { columnLetter } from '$lib/assay/grid';
import { unitText } from '$lib/client/numbers';
import { isFitted, type Fittable, type Quantity } from '$lib/schemas/quantity';
import type { AssayValue } from '$lib/schemas/run';

export const quantityText = (q: Quantity): string => `${q.value} ${unitText(q.unit)}`;

/** "0.5 mol/L", or that the fit is to find it. */
export function fittableText(f: Fittable): string {
	if (!isFitted(f)) return quantityText(f);
	return f.guess ? `to be fitted, from ${quantityText(f.guess)}` : 'to be fitted';
}

/** "row 9", or "column D" of a sheet whose times run across. */
export const sourceWords = (source: { row: number; column?: number }): string =>
	source.column ? `column ${columnLetter(source.column)}` : `row ${source.row}`;

export function valueText(value: AssayValue | undefined): string {
	if (value === null || value === undefined) return '–';
	if (typeof value === 'number') return String(value).replace('-', '\u2212');
	return 'below' in value ? `< ${value.below}` : `> ${value.above}`;
}

/** What a revision changed, for a person: quantities and lists in words, never raw records. */
export function changeText(value: unknown): string {
	if (value === null || value === undefined) return 'nothing';
	if (typeof value === 'boolean') return value ? 'yes' : 'no';
	if (typeof value === 'string' || typeof value === 'number') return String(value);
	if (typeof value !== 'object') return JSON.stringify(value);
	if ('value' in value && 'unit' in value) return quantityText(value as Quantity);
	if ('fit' in value) return fittableText(value as Fittable);
	if ('below' in value || 'above' in value) return valueText(value as AssayValue);
	if (Array.isArray(value)) return value.length === 1 ? changeText(value[0]) : `${value.length} entries`;
	return Object.entries(value)
		.map(([key, inner]) => `${key} ${changeText(inner)}`)
		.join(', ');
}
