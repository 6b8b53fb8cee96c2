/** Rows of a run's table: their addresses, and which of many are drawn. */

/** Where a page elsewhere links to: the row's place among the points of the run, from 1. */
export const rowAnchor = (index: number): string => `row-${index + 1}`;

/** The row that an address means; null where it means none of them. */
export function rowOfHash(hash: string, rows: number): number | null {
	const found = /^#row-(\d{1,7})$/.exec(hash);
	const index = found ? Number(found[1]) - 1 : -1;
	return index >= 0 && index < rows ? index : null;
}

/** So many rows are drawn whole, and can be searched and printed; of more, those in sight. */
export const MOST_WHOLE = 300;
const SPARE = 12;

export interface RowWindow {
	from: number;
	to: number;
}

export function rowWindow(rows: number, scrollTop: number, height: number, rowPx: number): RowWindow {
	if (rows <= MOST_WHOLE) return { from: 0, to: rows };
	const from = Math.max(0, Math.min(rows - 1, Math.floor(scrollTop / rowPx)) - SPARE);
	return { from, to: Math.min(rows, Math.ceil((scrollTop + height) / rowPx) + SPARE) };
}
