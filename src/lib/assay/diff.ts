/** What changed between two files of the same run, cell by cell: for the reason that a revision needs. */
import type { GridSheet, GridWorkbook } from '$lib/schemas/sheet';
import { address, displayText, SheetView } from './grid';
import { alignRows } from './row-alignment';

export interface CellChange {
	sheet: string;
	/** Address in the new file; `was` is the one in the old file where rows moved. */
	cell: string;
	was?: string;
	/** Texts as shown; '' where the cell is empty. `stored` tells a change that the display hides. */
	before: string;
	after: string;
	stored?: { before: string; after: string };
	/** A row that only one of the files has: one entry, at its first cell (in the old file when removed), with all its texts. */
	row?: 'inserted' | 'removed';
}

export interface WorkbookDifference {
	changes: CellChange[];
	/** All changed cells and rows; `changes` holds the first ones. */
	count: number;
	sheetsAdded: string[];
	sheetsRemoved: string[];
	dateSystemChanged: boolean;
}

const MOST = 2_000;

/** Compares cells in rows that belong together by what they hold: an inserted row is one insertion. */
export function diffWorkbooks(before: GridWorkbook, after: GridWorkbook): WorkbookDifference {
	const names = (w: GridWorkbook) => (w.kind === 'xlsx' ? w.sheets.map((s) => s.name) : ['']);
	const pick = (w: GridWorkbook, name: string): GridSheet | undefined =>
		name === '' ? w.sheets[0] : w.sheets.find((s) => s.name === name);
	const [old, now] = [names(before), names(after)];
	const difference: WorkbookDifference = {
		changes: [],
		count: 0,
		sheetsAdded: now.filter((n) => !old.includes(n)),
		sheetsRemoved: old.filter((n) => !now.includes(n)),
		dateSystemChanged: before.dateSystem !== after.dateSystem
	};
	for (const name of old.filter((n) => now.includes(n))) {
		const [a, b] = [pick(before, name), pick(after, name)];
		if (a && b) diffSheets(new SheetView(before, a), new SheetView(after, b), difference);
	}
	return difference;
}

/** Blank rows are not compared: one put in between moves the rows below it and changes nothing. */
function diffSheets(a: SheetView, b: SheetView, difference: WorkbookDifference): void {
	const [old, now] = [contentsOf(a), contentsOf(b)];
	const pairs = alignRows(
		old.map((row) => row.key),
		now.map((row) => row.key),
		(i, j) => likeness(old[i].cells, now[j].cells)
	);
	for (const [i, j] of pairs) {
		if (i !== null && j !== null) diffRow(a, b, old[i].row, now[j].row, difference);
		else if (i !== null) addRow(difference, a, 'removed', old[i].row);
		else if (j !== null) addRow(difference, b, 'inserted', now[j].row);
	}
}

interface RowContent {
	row: number;
	/** Column, stored value and shown text of each cell that holds something. */
	cells: string[];
	key: string;
}

function contentsOf(view: SheetView): RowContent[] {
	return view.sheet.rows.flatMap(({ r }) => {
		const cells = view
			.cellsOfRow(r)
			.filter((cell) => cell[1] !== null)
			.map((cell) => JSON.stringify([cell[0], cell[1], displayText(view.workbook, cell)]));
		return cells.length === 0 ? [] : [{ row: r, cells, key: cells.join('|') }];
	});
}

/** Share of the cells that two rows have in common. */
function likeness(a: string[], b: string[]): number {
	const own = new Set(a);
	return b.filter((cell) => own.has(cell)).length / Math.max(a.length, b.length);
}

function addRow(
	difference: WorkbookDifference,
	view: SheetView,
	row: 'inserted' | 'removed',
	r: number
): void {
	difference.count++;
	if (difference.changes.length >= MOST) return;
	const cells = view.cellsOfRow(r).filter((cell) => cell[1] !== null);
	const texts = cells.map((cell) => displayText(view.workbook, cell)).join(' | ');
	const [before, after] = row === 'removed' ? [texts, ''] : ['', texts];
	difference.changes.push({
		sheet: view.sheet.name,
		cell: address(r, cells[0]?.[0] ?? 1),
		before,
		after,
		row
	});
}

function diffRow(a: SheetView, b: SheetView, old: number, now: number, difference: WorkbookDifference): void {
	const filled = [...a.cellsOfRow(old), ...b.cellsOfRow(now)].map((cell) => cell[0]);
	for (const c of [...new Set(filled)].sort((x, y) => x - y)) {
		const change = changeOf(a, b, { old, now }, c);
		if (!change) continue;
		difference.count++;
		if (difference.changes.length < MOST) difference.changes.push(change);
	}
}

function changeOf(
	a: SheetView,
	b: SheetView,
	row: { old: number; now: number },
	column: number
): CellChange | null {
	const [old, now] = [a.cell(row.old, column), b.cell(row.now, column)];
	const stored = { before: String(old?.[1] ?? ''), after: String(now?.[1] ?? '') };
	const before = displayText(a.workbook, old);
	const after = displayText(b.workbook, now);
	if (stored.before === stored.after && before === after) return null;
	return {
		sheet: a.sheet.name,
		cell: address(row.now, column),
		...(row.old === row.now ? {} : { was: address(row.old, column) }),
		before,
		after,
		...(before === after ? { stored } : {})
	};
}
