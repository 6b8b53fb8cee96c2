/**
 * The first look at a workbook: which tables it holds, what their columns seem to be, what has to be asked. A proposal changes
 * nothing; a person confirms or corrects it, and `settle` makes the run.
 */
import type { SpeciesContent } from '$lib/schemas/scheme';
import type { Block, Finding, GridWorkbook, Proposal, TableProposal } from '$lib/schemas/sheet';
import { isTable } from './column-facts';
import type { SheetView } from './grid';
import { turnBlock } from './orientation';
import { proposeTable, type ProposeOptions } from './propose-table';
import { byRun } from './run-groups';
import { MOST_COLUMNS } from './side-by-side';
import { strayRows } from './stray-rows';
import { blockOnSheet, type FoundTable, overlap, tablesOf, viewOf } from './tables';
import { plural, someOf } from './wording';

export type { ProposeOptions } from './propose-table';

export function propose(
	workbook: GridWorkbook,
	species: SpeciesContent[],
	options: ProposeOptions = {}
): Proposal {
	const found = tablesOf(workbook).filter((t) => isTable(workbook, t));
	const runs = found.flatMap((t) => byRun(workbook, species, t));
	const tables = runs.map((t, i) => proposeTable(workbook, species, t, `t${i + 1}`, options));
	return {
		tables,
		findings: [...workbookFindings(workbook, tables), ...strayRows(workbook, found)],
		sheets: [
			...workbook.sheets.map((s) => ({
				name: s.name,
				state: s.state,
				tables: tables.filter((t) => t.sheet === s.name).map((t) => t.id),
				what: sheetWords(s.rows.length, tables.filter((t) => t.sheet === s.name).length)
			})),
			...(workbook.otherSheets ?? []).map((name) => ({
				name,
				state: 'visible' as const,
				tables: [],
				what: 'a chart or another sheet without cells'
			}))
		]
	};
}

/** A table that the person draws on the sheet: header rows are taken from directly above it when not given. */
export function proposeBlock(
	workbook: GridWorkbook,
	species: SpeciesContent[],
	sheet: string,
	drawn: Block,
	headerRows: number[] | null = null,
	id = 'drawn',
	options: ProposeOptions = {}
): TableProposal | null {
	const view = viewOf(workbook, sheet);
	if (!view) return null;
	const block = within(drawn, view);
	const across = tablesOf(workbook).find(
		(t) => t.across && t.sheet === sheet && overlap(blockOnSheet(t), block)
	);
	if (across) return proposeTable(workbook, species, drawnAcross(across, block), id, options);
	const near = tablesOf(workbook).find(
		(t) => t.sheet === sheet && t.block.firstRow <= block.lastRow && t.block.lastRow >= block.firstRow
	);
	const headers = headerRows ?? near?.headerRows.filter((r) => r < block.firstRow) ?? [];
	const found: FoundTable = {
		sheet,
		across: false,
		block,
		headerRows: headers,
		limitRows: near?.limitRows ?? [],
		footerRows: [],
		leftOutRows: [],
		withinRows: [],
		title: near?.title ?? sheet,
		above: near?.above ?? []
	};
	return proposeTable(workbook, species, found, id, options);
}

/** A block drawn over a table whose times run across: the names at its left stay its headers. */
function drawnAcross(near: FoundTable, drawn: Block): FoundTable {
	const block = turnBlock(drawn);
	const firstRow = Math.max(block.firstRow, ...near.headerRows.map((r) => r + 1));
	return {
		...near,
		block: { ...block, firstRow, lastRow: Math.max(block.lastRow, firstRow) },
		footerRows: [],
		leftOutRows: near.leftOutRows.filter((r) => r > firstRow && r < block.lastRow)
	};
}

/** The part of a drawn block that the sheet fills, at most as wide as a mapping may be. */
function within(drawn: Block, view: SheetView): Block {
	const lastRow = Math.min(drawn.lastRow, Math.max(view.sheet.lastRow, drawn.firstRow));
	const widest = drawn.firstColumn + MOST_COLUMNS - 1;
	const lastColumn = Math.min(drawn.lastColumn, widest, Math.max(view.sheet.lastColumn, drawn.firstColumn));
	return {
		...drawn,
		lastRow: Math.max(lastRow, drawn.firstRow),
		lastColumn: Math.max(lastColumn, drawn.firstColumn)
	};
}

function sheetWords(rows: number, tables: number): string {
	if (tables > 0) return plural(tables, 'table');
	return rows === 0 ? 'empty' : 'no table with a time column';
}

function workbookFindings(workbook: GridWorkbook, tables: TableProposal[]): Finding[] {
	const base = { sheet: '', cells: [], count: 0, expected: '', options: [], open: false };
	const findings: Finding[] = [];
	if (tables.length === 0)
		findings.push({
			...base,
			id: 'B1:workbook',
			level: 'stop',
			rule: 'B1',
			found: 'no table with a time column and numbers beside it',
			expected: 'a header row with a time column, for example "Time (h)", and a column for each species',
			message:
				'No table was found: a time column with values beside it, or a row of times with values below it, is expected. Mark the rows yourself, or upload a sheet in the form of the template.',
			open: true
		});
	const hidden = workbook.sheets.filter(
		(s) => s.state !== 'visible' && !tables.some((t) => t.sheet === s.name)
	);
	if (hidden.length > 0)
		findings.push({
			...base,
			id: 'B29:workbook',
			level: 'note',
			rule: 'B29',
			sheet: hidden[0].name,
			found: `${plural(hidden.length, 'hidden sheet')}: ${someOf(hidden.map((s) => `"${s.name}"`))}`,
			expected: 'tables on sheets that can be seen',
			message: `${someOf(hidden.map((s) => `"${s.name}"`))} ${hidden.length === 1 ? 'is a hidden sheet' : 'are hidden sheets'} without a table; not used. Unhide ${hidden.length === 1 ? 'it' : 'them'} and upload again if ${hidden.length === 1 ? 'it belongs' : 'they belong'} to the data.`
		});
	return findings;
}
