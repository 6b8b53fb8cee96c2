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

const decimalsOf = (text: string): number => /\.(\d+)$/.exec(text)?.[1].length ?? 0;

/** Most decimals among the values of a column, with which `alignedText` puts their decimal signs under each other. */
export const mostDecimals = (values: Iterable<AssayValue | undefined>): number => {
	let most = 0;
	for (const value of values) most = Math.max(most, decimalsOf(valueText(value)));
	return most;
};

/** A value at the right of its column with room for the decimals that it lacks: digits and sign as wide as printed ones. */
export function alignedText(value: AssayValue | undefined, decimals: number): string {
	const text = valueText(value);
	const own = decimalsOf(text);
	// A figure space is as wide as a digit in tabular figures, a punctuation space as the point.
	const point = own === 0 && decimals > 0 ? '\u2008' : '';
	return text + point + '\u2007'.repeat(Math.max(0, decimals - own));
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
