/** What the cells of a column are, counted once, and whether a block is a table at all. */
import type { GridWorkbook } from '$lib/schemas/sheet';
import { readCell } from './cells';
import { type ColumnFacts, readHeaders } from './columns';
import type { SheetView } from './grid';
import { type FoundTable, viewOfTable } from './tables';
import { timeColumnOf } from './time-column';

/** A time column by header, or by its numbers, and at least one other column of numbers. */
export function isTable(workbook: GridWorkbook, found: FoundTable): boolean {
	const view = viewOfTable(workbook, found);
	if (!view) return false;
	const time = timeColumnOf(view, found);
	if (time === 0 || found.block.lastRow === found.block.firstRow) return false;
	const headers = readHeaders(view, found.headerRows, found.block);
	return headers.some((h) => h.column !== time && factsOf(view, found, h.column).numbers > 0);
}

const knownFacts = new WeakMap<FoundTable, Map<number, ColumnFacts>>();

/** Counted once for each column of a table. */
export function factsOf(view: SheetView, found: FoundTable, column: number): ColumnFacts {
	const own = knownFacts.get(found) ?? new Map<number, ColumnFacts>();
	knownFacts.set(found, own);
	const facts = own.get(column) ?? countFacts(view, found, column);
	own.set(column, facts);
	return facts;
}

function countFacts(view: SheetView, found: FoundTable, column: number): ColumnFacts {
	const facts = { numbers: 0, texts: 0, dates: 0, distinct: 0 };
	const distinct = new Set<string>();
	for (const r of view.filledRows(found.block.firstRow, found.block.lastRow)) {
		const cell = view.cell(r, column);
		if (!cell) continue;
		const { kind } = readCell(view.workbook, cell, null);
		if (
			kind === 'number' ||
			kind === 'undecided' ||
			kind === 'with unit' ||
			kind === 'date' ||
			kind === 'marked'
		) {
			facts.numbers++;
			if (kind === 'date') facts.dates++;
		} else if (kind === 'text') {
			facts.texts++;
			if (distinct.size < 200) distinct.add(String(cell[1]));
		}
	}
	facts.distinct = distinct.size;
	return facts;
}
