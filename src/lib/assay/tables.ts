/** The tables of a workbook, found once and kept with it: proposing and settling look at the same ones. */
import type { GridWorkbook, Mapping } from '$lib/schemas/sheet';
import { findBlocks, type FoundBlock } from './blocks';
import { type ColumnHeader, readHeaders } from './columns';
import { countVotes } from './decimal-rule';
import { SheetView } from './grid';
import type { DecimalVotes } from './numbers';
import { MOST_COLUMNS } from './side-by-side';

export interface FoundTable extends FoundBlock {
	sheet: string;
}

const known = new WeakMap<GridWorkbook, FoundTable[]>();

const views = new WeakMap<GridWorkbook, Map<string, SheetView>>();

export function viewOf(workbook: GridWorkbook, sheet: string): SheetView | undefined {
	const own = views.get(workbook) ?? new Map<string, SheetView>();
	views.set(workbook, own);
	let view = own.get(sheet);
	const found = workbook.sheets.find((s) => s.name === sheet);
	if (!view && found) own.set(sheet, (view = new SheetView(workbook, found)));
	return view;
}

export function tablesOf(workbook: GridWorkbook): FoundTable[] {
	const before = known.get(workbook);
	if (before) return before;
	const tables = workbook.sheets.flatMap((sheet) => {
		const view = viewOf(workbook, sheet.name);
		return view ? findBlocks(view).map((found) => ({ ...found, sheet: sheet.name })) : [];
	});
	known.set(workbook, tables);
	return tables;
}

/** The found table that a mapping lies on, even when the person moved an edge. */
export function tableOf(workbook: GridWorkbook, mapping: Mapping): FoundTable | undefined {
	const { block } = mapping;
	return tablesOf(workbook).find(
		(t) =>
			t.sheet === mapping.sheet &&
			t.block.firstRow <= block.lastRow &&
			t.block.lastRow >= block.firstRow &&
			t.block.firstColumn <= block.lastColumn &&
			t.block.lastColumn >= block.firstColumn
	);
}

const counted = new WeakMap<GridWorkbook, DecimalVotes>();

/** What the cells of all tables say about the decimal sign of the file. */
export function votesOf(workbook: GridWorkbook, mapping?: Mapping): DecimalVotes {
	const drawn =
		mapping && !tableOf(workbook, mapping) ? [{ sheet: mapping.sheet, block: mapping.block }] : [];
	const before = counted.get(workbook);
	if (before && drawn.length === 0) return before;
	const votes = countVotes(workbook, [...tablesOf(workbook), ...drawn]);
	if (drawn.length === 0) counted.set(workbook, votes);
	return votes;
}

/** Headers of a mapping's columns; a block that reaches beyond the filled part of the sheet is cut there. */
export function headersOf(view: SheetView, mapping: Mapping): Map<number, ColumnHeader> {
	const { block } = mapping;
	const lastColumn = Math.min(block.lastColumn, view.sheet.lastColumn, block.firstColumn + MOST_COLUMNS - 1);
	return new Map(readHeaders(view, mapping.headerRows, { ...block, lastColumn }).map((h) => [h.column, h]));
}
