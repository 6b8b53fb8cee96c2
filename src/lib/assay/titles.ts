/** The texts around a table that may name it or state its conditions. */
import { displayText, type SheetView } from './grid';

export interface TextLine {
	row: number;
	text: string;
}

const MOST_LINES = 12;

/** Rows above `top` that hold anything, nearest first; `floor` is the index of the first row looked at, `part` limits the columns. */
export function textsAbove(
	view: SheetView,
	top: number,
	floor = 0,
	part: { first: number; last: number } | null = null
): TextLine[] {
	const found: TextLine[] = [];
	const { rows } = view.sheet;
	for (let k = rowsBefore(view, top) - 1; k >= floor && found.length < MOST_LINES; k--) {
		const line = lineOf(view, rows[k].r, part);
		if (line) found.push(line);
	}
	return found;
}

/** The first rows below a table. */
export function textsBelow(view: SheetView, bottom: number, most: number): TextLine[] {
	return view.sheet.rows
		.filter((row) => row.r > bottom && row.r <= bottom + most)
		.flatMap((row) => lineOf(view, row.r, null) ?? []);
}

/** How many of the sheet's rows lie above; the rows increase. */
function rowsBefore(view: SheetView, top: number): number {
	const { rows } = view.sheet;
	let [low, high] = [0, rows.length];
	while (low < high) {
		const middle = (low + high) >> 1;
		if (rows[middle].r < top) low = middle + 1;
		else high = middle;
	}
	return low;
}

function lineOf(view: SheetView, row: number, part: { first: number; last: number } | null): TextLine | null {
	const cells = view.cellsOfRow(row).filter((c) => !part || (c[0] >= part.first && c[0] <= part.last));
	const text = cells
		.map((c) => displayText(view.workbook, c).trim())
		.filter(Boolean)
		.join(' ');
	return text ? { row, text: text.slice(0, 200) } : null;
}

/** The nearest line that reads like a title: one cell, or the first line of the sheet. */
export function titleOf(view: SheetView, above: TextLine[]): string {
	const lone = above.find(({ row }) => view.cellsOfRow(row).filter((c) => c[1] !== null).length === 1);
	return (lone ?? above[above.length - 1])?.text.slice(0, 120) ?? view.sheet.name;
}
