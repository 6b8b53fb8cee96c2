/** A table as it is offered: where it lies and its first rows. */
import { displayText, type SheetView } from '$lib/assay';
import type { Block, TableProposal } from '$lib/schemas/sheet';

const ROWS = 3;
const COLUMNS = 5;

export interface TableCard {
	title: string;
	where: string;
	hidden: boolean;
	/** "14 rows", or "14 columns" where times run across. */
	count: string;
	head: string[];
	rows: string[][];
	/** Columns beyond those shown. */
	more: number;
}

export function tableCard(table: TableProposal, block: Block, view: SheetView): TableCard {
	const { sheet, workbook } = view;
	const across = table.mapping.across !== undefined;
	const rows = view.filledRows(block.firstRow, block.lastRow);
	const columns = table.columns.slice(0, COLUMNS);
	const samples = across ? block.lastColumn - block.firstColumn + 1 : rows.length;
	return {
		title: table.title,
		where: `${sheet.name}, ${table.range}`,
		hidden: sheet.state !== 'visible',
		count: `${samples} ${across ? 'columns' : 'rows'}`,
		head: columns.map((c) => c.header.split(' / ').at(-1) || c.letter),
		rows: rows.slice(0, ROWS).map((r) => columns.map((c) => displayText(workbook, view.cell(r, c.column)))),
		more: table.columns.length - columns.length
	};
}
