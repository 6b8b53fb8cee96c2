/** Where rows and columns of a sheet lie on the screen, so that only those in sight are drawn. */
import { displayText } from '$lib/assay';
import type { Block, GridSheet, GridWorkbook } from '$lib/schemas/sheet';

export const ROW_PX = 26;
export const HEAD_PX = 24;
export const NUMBER_PX = 46;
const NARROW = 58;
const WIDE = 230;
const LETTER_PX = 7.6;
/** Rows looked at for the width of a column. */
const SAMPLED = 300;
const MOST_COLUMNS = 200;

export interface GridLayout {
	/** Numbers of the rows that hold something, in order; blank rows are left out. */
	rows: number[];
	columns: number[];
	widths: number[];
	/** Left edge of each column, and the whole width at the end. */
	lefts: number[];
	height: number;
}

/** Longer texts are titles and notes: they run on as on paper and do not make their column wide. */
const LONGEST = 26;

function widthOf(texts: string[]): number {
	const longest = Math.max(0, ...texts.map((t) => t.length).filter((length) => length <= LONGEST));
	return Math.round(Math.min(WIDE, Math.max(NARROW, longest * LETTER_PX + 20)));
}

/** Rows with a few cells at least: titles, footers and notes have one or two and do not set a width. */
const isTabular = (row: GridSheet['rows'][0]): boolean => row.c.filter((c) => c[1] !== null).length >= 3;

export function layoutOf(workbook: GridWorkbook, sheet: GridSheet): GridLayout {
	const used = new Map<number, string[]>();
	const across = new Set(sheet.merges.filter((m) => m[3] > m[1]).map((m) => `${m[0]} ${m[1]}`));
	const tabular = sheet.rows.some(isTabular);
	sheet.rows.forEach((row, i) => {
		const counts = i < SAMPLED && (!tabular || isTabular(row));
		for (const cell of row.c) {
			if (cell[1] === null || cell[1] === '') continue;
			const texts = used.get(cell[0]) ?? [];
			used.set(cell[0], texts);
			// A header merged over several columns has them all for its room.
			if (counts && !across.has(`${row.r} ${cell[0]}`)) texts.push(displayText(workbook, cell));
		}
	});
	const columns = [...used.keys()].sort((a, b) => a - b).slice(0, MOST_COLUMNS);
	const widths = columns.map((c) => widthOf(used.get(c) ?? []));
	const lefts = [NUMBER_PX];
	for (const width of widths) lefts.push(lefts[lefts.length - 1] + width);
	const rows = sheet.rows.filter((row) => row.c.some((c) => c[1] !== null && c[1] !== '')).map((row) => row.r);
	return { rows, columns, widths, lefts, height: rows.length * ROW_PX };
}

/** Rows drawn beyond each edge, so that a turn of the wheel finds them there. */
const SPARE = 6;

/** Place of the first entry of an increasing list that is at least `n`; the length of the list where there is none. */
export function placeOf(list: number[], n: number): number {
	let [low, high] = [0, list.length];
	while (low < high) {
		const middle = (low + high) >> 1;
		if (list[middle] < n) low = middle + 1;
		else high = middle;
	}
	return low;
}

/** Places of the rows to be drawn, with a few beyond the edge. */
export function rowsInSight(layout: GridLayout, scrollTop: number, height: number, spare = SPARE): [number, number] {
	const first = Math.max(0, Math.floor(scrollTop / ROW_PX) - spare);
	const last = Math.min(layout.rows.length, Math.ceil((scrollTop + height) / ROW_PX) + spare);
	return [first, last];
}

/** As many lines as are ever drawn at once: a line that leaves on one side comes back on the other with another row. */
export const linesDrawn = (height: number, spare = SPARE): number => Math.ceil(height / ROW_PX) + 2 * spare + 2;

export interface Frame {
	top: number;
	left: number;
	width: number;
	height: number;
}

/** The outline of a block, in px from the first row's and the sheet's corner; null where none of it is drawn. */
export function frameOf(layout: GridLayout, block: Block): Frame | null {
	const { rows, columns, lefts } = layout;
	const [top, bottom] = [placeOf(rows, block.firstRow), placeOf(rows, block.lastRow + 1)];
	const [first, end] = [placeOf(columns, block.firstColumn), placeOf(columns, block.lastColumn + 1)];
	if (bottom <= top || end <= first) return null;
	return {
		top: top * ROW_PX,
		left: lefts[first],
		width: lefts[end] - lefts[first],
		height: (bottom - top) * ROW_PX
	};
}
