/** Rows that count up the rows above them without saying so: the totals row of a spreadsheet's table, a sum or mean below the data. */
import type { SheetView } from './grid';

/** Relative distance within which a stored result equals the sum or mean that it shows. */
const CLOSE = 1e-6;

/** True when the last row holds nothing but sums or means of the rows above, in two columns at least. */
export function isTotalsRow(view: SheetView, rows: number[]): boolean {
	const above = rows.slice(0, -1);
	if (above.length < 3) return false;
	const numbers = view.cellsOfRow(rows[rows.length - 1]).filter((cell) => typeof cell[1] === 'number');
	const outcomes = numbers.map((cell) => counts(view, above, cell[0], Number(cell[1])));
	const sums = outcomes.filter((kind) => kind === 'sum').length;
	const means = outcomes.filter((kind) => kind === 'mean').length;
	return numbers.length >= 2 &&
		sums + means + outcomes.filter((k) => k === 'nothing').length === numbers.length
		? sums + means >= 2
		: false;
}

/** What a number is to the column above it; zero below zeros says nothing. */
function counts(
	view: SheetView,
	above: number[],
	column: number,
	value: number
): 'sum' | 'mean' | 'nothing' | 'other' {
	const own = above.flatMap((r) => {
		const cell = view.cell(r, column)?.[1];
		return typeof cell === 'number' ? [cell] : [];
	});
	if (own.length < 3) return 'other';
	// A column that never changes has its own value as its mean: a constant temperature is no total.
	if (own.every((v) => v === own[0])) return value === own[0] || value === 0 ? 'nothing' : 'other';
	const sum = own.reduce((a, b) => a + b, 0);
	const close = (a: number) => Math.abs(a - value) <= CLOSE * Math.max(Math.abs(a), Math.abs(value));
	return close(sum) ? 'sum' : close(sum / own.length) ? 'mean' : 'other';
}
