/** What changed between two files of the same run, cell by cell: for the reason that a revision needs. */
import type { GridSheet, GridWorkbook } from '$lib/schemas/sheet';
import { address, displayText, SheetView } from './grid';

export interface CellChange {
	sheet: string;
	cell: string;
	/** Texts as shown; '' where the cell is empty. `stored` tells a change that the display hides. */
	before: string;
	after: string;
	stored?: { before: string; after: string };
}

export interface WorkbookDifference {
	changes: CellChange[];
	/** All changed cells; `changes` holds the first ones. */
	count: number;
	sheetsAdded: string[];
	sheetsRemoved: string[];
	dateSystemChanged: boolean;
}

const MOST = 2_000;

/** Compares cells at equal addresses; an inserted row therefore shows as changes in all rows below it. */
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

function diffSheets(a: SheetView, b: SheetView, difference: WorkbookDifference): void {
	const rows = [...new Set([...a.sheet.rows, ...b.sheet.rows].map((row) => row.r))].sort((x, y) => x - y);
	for (const r of rows) {
		const columns = [...new Set([...a.cellsOfRow(r), ...b.cellsOfRow(r)].map((cell) => cell[0]))].sort(
			(x, y) => x - y
		);
		for (const c of columns) {
			const change = changeOf(a, b, r, c);
			if (!change) continue;
			difference.count++;
			if (difference.changes.length < MOST) difference.changes.push(change);
		}
	}
}

function changeOf(a: SheetView, b: SheetView, row: number, column: number): CellChange | null {
	const [old, now] = [a.cell(row, column), b.cell(row, column)];
	const stored = { before: String(old?.[1] ?? ''), after: String(now?.[1] ?? '') };
	const before = displayText(a.workbook, old);
	const after = displayText(b.workbook, now);
	if (stored.before === stored.after && before === after) return null;
	return {
		sheet: a.sheet.name,
		cell: address(row, column),
		before,
		after,
		...(before === after ? { stored } : {})
	};
}
