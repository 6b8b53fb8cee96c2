/**
 * Tables whose times run across the top: a row that begins with a word for time and goes on with times, among rows that begin
 * with a name. They are found by the same steps as all others, on that part of the sheet turned over its diagonal.
 */
import type { GridCell } from '$lib/schemas/sheet';
import { findBlocks, type FoundBlock } from './blocks';
import { SheetView } from './grid';
import { turnSheet } from './orientation';
import { speaksOfTime } from './rows';
import { timeColumnOf } from './time-column';
import { readTime } from './times';
import { textsAbove, textsBelow, titleOf } from './titles';

/** Times that a row must hold to be one. */
const FEWEST = 3;
/** Blank rows inside a table. */
const GAP = 1;

export function findAcross(view: SheetView): FoundBlock[] {
	const found: FoundBlock[] = [];
	let done = 0;
	view.sheet.rows.forEach((row, i) => {
		if (row.r <= done) return;
		const first = timesAcross(view, row.c);
		const region = first === null ? null : regionOf(view, i, first);
		if (!region) return;
		found.push(...tablesIn(view, region));
		done = region.last;
	});
	return found;
}

/** Column of the first time of a row that reads "Time (h) | 0 | 1 | 2", or "Species | 0 h | 1 h | 2 h"; null for any other. */
function timesAcross(view: SheetView, cells: GridCell[]): number | null {
	const filled = cells.filter((c) => c[1] !== null);
	if (filled.length <= FEWEST) return null;
	const lead = filled.findIndex((c) => typeof c[1] === 'string');
	// Rows of a text file are all texts: those that begin with a number are samples.
	if (lead < 0 || lead > 1 || !/\p{L}/u.test(String(filled[lead][1]))) return null;
	const rest = filled.slice(lead + 1);
	const kinds = rest.map((c) => readTime(view.workbook, c, null).kind);
	const times = kinds.filter((k) => k !== 'text' && k !== 'error' && k !== 'blank').length;
	if (times < FEWEST || times < rest.length - 2) return null;
	const named = speaksOfTime(String(filled[lead][1]));
	const carried = kinds.filter((k) => k === 'worded').length >= FEWEST;
	if (!named && !carried) return null;
	return rest[kinds.findIndex((k) => k !== 'text' && k !== 'blank')][0];
}

interface Region {
	first: number;
	last: number;
}

/** The rows around the times that begin with a name and hold something below a time; null when the rows below are samples. */
function regionOf(view: SheetView, at: number, column: number): Region | null {
	const rows = view.sheet.rows;
	const belongs = (cells: GridCell[]): boolean => {
		const lead = cells.find((c) => c[1] !== null);
		return (
			lead !== undefined &&
			typeof lead[1] === 'string' &&
			lead[0] < column &&
			cells.some((c) => c[0] >= column && c[1] !== null)
		);
	};
	const walk = (step: 1 | -1): number => {
		let k = at;
		for (let next = at + step; rows[next]; next += step) {
			const gap = Math.abs(rows[next].r - rows[k].r) - 1;
			if (gap > GAP || !belongs(rows[next].c) || timesAcross(view, rows[next].c) !== null) break;
			k = next;
		}
		return k;
	};
	const [top, bottom] = [walk(-1), walk(1)];
	const below = rows.slice(at + 1, bottom + 1);
	const above = rows.slice(top, at).filter(({ c }) => c.filter((cell) => cell[0] >= column).length >= FEWEST);
	if (below.length === 0 && above.length === 0) return null;
	// "Time (h) | 1 | 2 | 3" above rows of numbers: the numbers are names of compounds.
	const next = rows[at + 1];
	if (below.length === 0 && next && next.r - rows[at].r <= GAP + 1 && typeof next.c[0]?.[1] === 'number')
		return null;
	return { first: above.length > 0 ? above[0].r : rows[at].r, last: rows[bottom].r };
}

function tablesIn(view: SheetView, region: Region): FoundBlock[] {
	const turned = new SheetView(view.workbook, turnSheet(view.sheet, region.first, region.last));
	const above = textsAbove(view, region.first);
	return findBlocks(turned)
		.filter((found) => found.block.lastRow > found.block.firstRow && timeColumnOf(turned, found) > 0)
		.map((found) => ({
			...found,
			title: titleOf(view, above),
			above: [...above, ...textsBelow(view, region.last, 3)]
		}));
}
