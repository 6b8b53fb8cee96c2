/** Rows of a run's table: their addresses, and which of many are drawn. */

import type { RunContent } from '$lib/schemas/run';

type Timepoint = Pick<RunContent['timepoints'][0], 'source'>;

/**
 * The number by which a row is known everywhere: its row in the sheet (its column, where times run across), or its place among
 * the points, from 1, where no sheet is behind it.
 */
export const rowNumber = ({ source }: Timepoint, index: number): number =>
	source ? (source.column ?? source.row) : index + 1;

/** Where a page elsewhere links to. */
export const rowAnchor = (point: Timepoint, index: number): string => `row-${rowNumber(point, index)}`;

/** Place of the row that an address means; null where it means none of them. */
export function rowOfHash(hash: string, rows: readonly Timepoint[]): number | null {
	const found = /^#row-(\d{1,7})$/.exec(hash);
	const index = found ? rows.findIndex((point, i) => rowNumber(point, i) === Number(found[1])) : -1;
	return index < 0 ? null : index;
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
