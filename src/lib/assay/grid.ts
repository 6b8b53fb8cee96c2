/** Reading access to a workbook as received: cells by address, what a person saw in them, what is hidden. */
import { CELL } from '$lib/schemas/cell-flags';
import type { CellStyle, GridCell, GridRow, GridSheet, GridWorkbook } from '$lib/schemas/sheet';
import { formatNumber } from './number-format';

/** "A" for 1, "XFD" for 16384. */
export function columnLetter(column: number): string {
	let text = '';
	for (let n = column; n > 0; n = Math.floor((n - 1) / 26))
		text = String.fromCharCode(65 + ((n - 1) % 26)) + text;
	return text;
}

/** 1 for "A"; 0 when the text is not a column. */
export function columnNumber(letters: string): number {
	if (!/^[A-Za-z]{1,3}$/.test(letters)) return 0;
	let n = 0;
	for (const letter of letters.toUpperCase()) n = n * 26 + letter.charCodeAt(0) - 64;
	return n;
}

export const address = (row: number, column: number): string => columnLetter(column) + String(row);

/** Row and column of an address such as "A14"; null when it is not one. */
export function parseAddress(text: string): { row: number; column: number } | null {
	const match = /^\$?([A-Za-z]{1,3})\$?(\d{1,7})$/.exec(text);
	if (!match) return null;
	const column = columnNumber(match[1]);
	const row = Number(match[2]);
	return column >= 1 && column <= 16_384 && row >= 1 && row <= 1_048_576 ? { row, column } : null;
}

export const rangeText = (b: {
	firstRow: number;
	lastRow: number;
	firstColumn: number;
	lastColumn: number;
}) => `${address(b.firstRow, b.firstColumn)}:${address(b.lastRow, b.lastColumn)}`;

export const cellStyle = (workbook: GridWorkbook, cell: GridCell): CellStyle =>
	workbook.styles[cell[2] ?? 0] ?? workbook.styles[0] ?? PLAIN;
export const PLAIN: CellStyle = { format: 'General', kind: 'general' };

export const hasFlag = (cell: GridCell, flag: number): boolean => ((cell[3] ?? 0) & flag) !== 0;

/** The text that a person saw in the cell. */
export function displayText(workbook: GridWorkbook, cell: GridCell | undefined): string {
	if (!cell || cell[1] === null) return '';
	const value = cell[1];
	if (typeof value === 'string') return value;
	if (typeof value === 'boolean') return value ? 'TRUE' : 'FALSE';
	if (hasFlag(cell, CELL.error)) return String(value);
	const style = cellStyle(workbook, cell);
	return formatNumber(value, style.format, style.kind, workbook.dateSystem);
}

/** A sheet with quick access by row and column; merged areas answer with their first cell where asked. */
export class SheetView {
	private readonly rows = new Map<number, GridRow>();
	/** Cells by column, of the rows that were asked for: a page draws some forty of twenty thousand. */
	private readonly cells = new Map<number, Map<number, GridCell>>();
	constructor(
		readonly workbook: GridWorkbook,
		readonly sheet: GridSheet
	) {
		for (const row of sheet.rows) this.rows.set(row.r, row);
	}

	private rowAt(row: number): Map<number, GridCell> | undefined {
		const before = this.cells.get(row);
		if (before) return before;
		const found = this.rows.get(row);
		if (!found) return undefined;
		const cells = new Map(found.c.map((cell) => [cell[0], cell]));
		this.cells.set(row, cells);
		return cells;
	}

	cell(row: number, column: number): GridCell | undefined {
		return this.rowAt(row)?.get(column);
	}

	cellsOfRow(row: number): GridCell[] {
		return [...(this.rowAt(row)?.values() ?? [])];
	}

	text(row: number, column: number): string {
		return displayText(this.workbook, this.cell(row, column)).trim();
	}

	/** Rows that hold anything, from `first` to `last`: never walks the blank rows of a sheet. */
	filledRows(first: number, last: number): number[] {
		return this.sheet.rows.filter((row) => row.r >= first && row.r <= last).map((row) => row.r);
	}

	/** The merged area that covers a cell, if one does. */
	mergeAt(row: number, column: number): [number, number, number, number] | undefined {
		return this.sheet.merges.find((m) => row >= m[0] && row <= m[2] && column >= m[1] && column <= m[3]);
	}

	/** The cell, or the first cell of the merged area that covers it. */
	mergedCell(row: number, column: number): GridCell | undefined {
		const own = this.cell(row, column);
		if (own && own[1] !== null) return own;
		const merge = this.mergeAt(row, column);
		return merge ? this.cell(merge[0], merge[1]) : own;
	}

	rowHidden(row: number): boolean {
		return this.sheet.hiddenRows.some(([first, last]) => row >= first && row <= last);
	}

	columnHidden(column: number): boolean {
		return this.sheet.hiddenColumns.some(([first, last]) => column >= first && column <= last);
	}

	style(row: number, column: number): CellStyle {
		const cell = this.cell(row, column);
		return cell ? cellStyle(this.workbook, cell) : PLAIN;
	}
}
