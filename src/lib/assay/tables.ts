/** The tables of a workbook, found once and kept with it: proposing and settling look at the same ones. */
import type { Block, GridWorkbook, Mapping } from '$lib/schemas/sheet';
import { findAcross } from './across';
import { findBlocks, type FoundBlock } from './blocks';
import { type ColumnHeader, readHeaders } from './columns';
import { countVotes } from './decimal-rule';
import { SheetView } from './grid';
import type { DecimalVotes } from './numbers';
import { asOnSheet, turnBlock, turnSheet } from './orientation';
import { MOST_COLUMNS } from './side-by-side';

export interface FoundTable extends FoundBlock {
	sheet: string;
	/** Times run across: the block and its rows count on the turned sheet. */
	across: boolean;
	/** Of several runs under labels of their own: the columns of this one. */
	only?: Set<number>;
}

const known = new WeakMap<GridWorkbook, FoundTable[]>();

const views = new WeakMap<GridWorkbook, Map<string, SheetView>>();

/** A sheet as received, or turned over its diagonal. */
export function viewOf(workbook: GridWorkbook, sheet: string, across = false): SheetView | undefined {
	const own = views.get(workbook) ?? new Map<string, SheetView>();
	views.set(workbook, own);
	const key = `${across ? 'across' : 'down'} ${sheet}`;
	let view = own.get(key);
	const found = workbook.sheets.find((s) => s.name === sheet);
	if (!view && found) own.set(key, (view = new SheetView(workbook, across ? turnSheet(found) : found)));
	return view;
}

/** The view that a table was found on. */
export const viewOfTable = (workbook: GridWorkbook, found: FoundTable): SheetView | undefined =>
	viewOf(workbook, found.sheet, found.across);

/** The block of a table on the sheet as received. */
export const blockOnSheet = (found: FoundTable): Block =>
	found.across ? turnBlock(found.block) : found.block;

export function tablesOf(workbook: GridWorkbook): FoundTable[] {
	const before = known.get(workbook);
	if (before) return before;
	const tables = workbook.sheets.flatMap((sheet) => {
		const view = viewOf(workbook, sheet.name);
		return view ? tablesOfSheet(workbook, view, sheet.name) : [];
	});
	known.set(workbook, tables);
	return tables;
}

/** Blocks by rows, but for those parts of the sheet where times run across. */
function tablesOfSheet(workbook: GridWorkbook, view: SheetView, sheet: string): FoundTable[] {
	const turned = findAcross(view).map((found): FoundTable => ({ ...found, sheet, across: true }));
	const down = findBlocks(view)
		.filter(({ block }) => !turned.some((t) => overlap(blockOnSheet(t), block)))
		.map((found): FoundTable => ({ ...found, sheet, across: false }));
	const top = (t: FoundTable) => blockOnSheet(t).firstRow;
	return turned.length === 0 ? down : [...turned, ...down].sort((a, b) => top(a) - top(b));
}

/** A table without a header right below, in the same columns: what blank rows part may be one table. */
export function headlessBelow(
	workbook: GridWorkbook,
	mapping: Pick<Mapping, 'sheet' | 'block'>
): Block | null {
	const { block } = mapping;
	const below = tablesOf(workbook)
		.filter((t) => t.sheet === mapping.sheet && !t.across && t.block.firstRow > block.lastRow)
		.sort((a, b) => a.block.firstRow - b.block.firstRow)[0];
	if (!below || below.headerRows.length > 0) return null;
	const same = below.block.firstColumn === block.firstColumn && below.block.lastColumn === block.lastColumn;
	return same ? below.block : null;
}

export const overlap = (a: Block, b: Block): boolean =>
	a.firstRow <= b.lastRow &&
	a.lastRow >= b.firstRow &&
	a.firstColumn <= b.lastColumn &&
	a.lastColumn >= b.firstColumn;

/** The found table that a mapping, in columns, lies on, even when the person moved an edge. */
export function tableOf(workbook: GridWorkbook, mapping: Mapping): FoundTable | undefined {
	const { block } = mapping;
	return tablesOf(workbook).find(
		(t) => t.sheet === mapping.sheet && t.across === (mapping.across !== undefined) && overlap(t.block, block)
	);
}

const counted = new WeakMap<GridWorkbook, DecimalVotes>();

/** What the cells of all tables say about the decimal sign of the file. */
export function votesOf(workbook: GridWorkbook, mapping?: Mapping): DecimalVotes {
	const drawn =
		mapping && !tableOf(workbook, mapping) ? [{ sheet: mapping.sheet, block: asOnSheet(mapping).block }] : [];
	const before = counted.get(workbook);
	if (before && drawn.length === 0) return before;
	const found = tablesOf(workbook).map((t) => ({ sheet: t.sheet, block: blockOnSheet(t) }));
	const votes = countVotes(workbook, [...found, ...drawn]);
	if (drawn.length === 0) counted.set(workbook, votes);
	return votes;
}

/** Headers of the columns of a mapping in columns; a block that reaches beyond the filled part of the sheet is cut there. */
export function headersOf(view: SheetView, mapping: Mapping): Map<number, ColumnHeader> {
	const { block } = mapping;
	const lastColumn = Math.min(block.lastColumn, view.sheet.lastColumn, block.firstColumn + MOST_COLUMNS - 1);
	return new Map(readHeaders(view, mapping.headerRows, { ...block, lastColumn }).map((h) => [h.column, h]));
}
