import type { Cell, Sheet } from 'xlsx-populate';
import { cellText, looksLikeFormula } from './text';

export type Cached = number | string | boolean;
export type Written = string | number | boolean | null | undefined;

/** Column letters: 1 → A, 27 → AA. */
export function letters(column: number): string {
	let text = '';
	for (let c = column; c > 0; c = Math.floor((c - 1) / 26))
		text = String.fromCharCode(65 + ((c - 1) % 26)) + text;
	return text;
}
/** $B$4, for formulas that stay where they are. */
export const at = (row: number, column: number): string => `$${letters(column)}$${row}`;
export const span = (row: number, column: number, toRow: number, toColumn: number): string =>
	`${at(row, column)}:${at(toRow, toColumn)}`;
/** 'Data as used'!$B$4 */
export const on = (sheet: string, range: string): string => `'${sheet.replaceAll("'", "''")}'!${range}`;

/** A number inside a formula. Programs differ in how they read an exponent, so it is written as a power of ten. */
export function literal(value: number): string {
	const text = String(value);
	const [digits, power] = text.split('e');
	const plain = power === undefined ? text : `${digits}*10^${Number(power)}`;
	return value < 0 || power !== undefined ? `(${plain})` : plain;
}

const HEADING = { bold: true, fontColor: '1D2B2A' };
const HEADER = { bold: true, fill: 'EBE5D8', border: { bottom: { style: 'thin', color: 'D9D2C3' } } };
const SOFT = { fontColor: '5B6764' };

/** A formula cell keeps its value beside it, so that viewers which do not calculate show it too. */
interface Internals {
	_remainingAttributes?: Record<string, unknown>;
	_remainingChildren?: { name: string; children: unknown[] }[];
}

function cache(cell: Cell, value: Cached): void {
	const internals = cell as unknown as Internals;
	if (typeof value === 'string') internals._remainingAttributes = { t: 'str' };
	if (typeof value === 'boolean') internals._remainingAttributes = { t: 'b' };
	const text = typeof value === 'boolean' ? Number(value) : value;
	internals._remainingChildren = [{ name: 'v', children: [text] }];
}

/** Writes one sheet: text stays text, numbers stay whole, formulas carry their value. Counts what it writes. */
export class SheetWriter {
	/** Formula cells written to all sheets of one workbook. */
	formulas = 0;
	private readonly widths = new Map<number, number>();

	constructor(
		readonly sheet: Sheet,
		readonly name: string
	) {}

	text(row: number, column: number, text: string): void {
		const clean = cellText(text);
		if (clean === '') return;
		const cell = this.sheet.cell(row, column).value(clean);
		if (looksLikeFormula(clean)) cell.style('numberFormat', '@');
		this.widen(column, clean.length);
	}

	number(row: number, column: number, value: number, format?: string): void {
		// A spreadsheet has no NaN or infinity: they stand as words.
		if (!Number.isFinite(value)) return this.text(row, column, String(value));
		const cell = this.sheet.cell(row, column).value(value);
		if (format) cell.style('numberFormat', format);
		this.widen(column, 12);
	}

	put(row: number, column: number, value: Written): void {
		if (typeof value === 'number') this.number(row, column, value);
		else if (typeof value === 'boolean') this.sheet.cell(row, column).value(value);
		else if (value !== null && value !== undefined) this.text(row, column, value);
	}

	row(row: number, values: Written[], column = 1): void {
		values.forEach((value, i) => this.put(row, column + i, value));
	}

	formula(row: number, column: number, formula: string, value: Cached): void {
		if (typeof value === 'number' && !Number.isFinite(value))
			throw new RangeError(`${this.name}!${letters(column)}${row} would show ${value}.`);
		cache(this.sheet.cell(row, column).formula(formula), value);
		this.formulas++;
	}

	heading(row: number, text: string): void {
		this.text(row, 1, text);
		this.sheet.cell(row, 1).style({ ...HEADING, fontSize: row === 1 ? 15 : 12 });
	}

	header(row: number, values: string[], column = 1): void {
		this.row(row, values, column);
		values.forEach((_, i) => this.sheet.cell(row, column + i).style(HEADER));
	}

	/** A remark under the title. */
	note(row: number, text: string): void {
		this.sheet.cell(row, 1).value(cellText(text)).style(SOFT);
	}

	table(row: number, header: string[], rows: Written[][]): number {
		this.header(row, header);
		rows.forEach((values, i) => this.row(row + 1 + i, values));
		return row + 1 + rows.length;
	}

	finish(frozenRows = 0): void {
		for (const [column, width] of this.widths)
			this.sheet.column(column).width(Math.min(60, Math.max(11, width + 2)));
		if (frozenRows > 0) this.sheet.freezePanes(0, frozenRows);
	}

	private widen(column: number, length: number): void {
		if (length <= 60) this.widths.set(column, Math.max(this.widths.get(column) ?? 0, length));
	}
}
