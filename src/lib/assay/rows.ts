/** What each row of a sheet looks like: data, header, footer, text. First step of finding tables. */
import type { GridCell, GridRow, GridWorkbook } from '$lib/schemas/sheet';
import { isValueLike, readCell, type CellReading } from './cells';
import { displayText } from './grid';
import { readTimeText } from './times';
import { readUnit, splitHeader } from './units';
import { isClockWord, isFooterWord, isLimitWord, isTimeWord } from './words';

export interface RowLook {
	r: number;
	/** Columns with a number (of any format), with anything that counts as a value, and with other text. */
	numbers: number[];
	values: number[];
	texts: { column: number; text: string }[];
	first: number;
	last: number;
	/** Text of the first cell that holds text, when the row begins with text. */
	lead: string;
	/** Cells that are nothing but a unit. */
	units: number;
}

export function lookAt(workbook: GridWorkbook, row: GridRow): RowLook {
	const look: RowLook = {
		r: row.r,
		numbers: [],
		values: [],
		texts: [],
		first: 0,
		last: 0,
		lead: '',
		units: 0
	};
	for (const cell of row.c) {
		const reading = readCell(workbook, cell, null);
		if (reading.kind === 'blank') continue;
		if (look.first === 0) look.first = cell[0];
		look.last = cell[0];
		take(look, workbook, cell, reading);
	}
	return look;
}

function take(look: RowLook, workbook: GridWorkbook, cell: GridCell, reading: CellReading): void {
	const column = cell[0];
	if (reading.kind === 'error' || reading.kind === 'uncomputed') {
		look.values.push(column);
		return;
	}
	const known = typeof cell[1] === 'number' || reading.kind === 'number' || reading.kind === 'undecided';
	const text = known ? '' : displayText(workbook, cell).trim();
	if (known || isTimeText(cell, text)) {
		look.numbers.push(column);
		look.values.push(column);
		return;
	}
	if (isValueLike(reading) && !(reading.kind === 'below' && reading.text.toLowerCase() === 'loq')) {
		look.values.push(column);
		return;
	}
	if (look.texts.length === 0 && column === look.first) look.lead = text;
	if (readUnit(text.replace(/^[([]|[)\]]$/g, ''))) look.units++;
	look.texts.push({ column, text });
}

/** Times and dates as text ("1:30", "90 min", "2026-12-01 09:40") count as numbers for the look of a row. */
function isTimeText(cell: GridCell, text: string): boolean {
	if (typeof cell[1] !== 'string' || text.length > 40 || !/\d/.test(text)) return false;
	if (/^t\s*[=:_]?\s*0$/i.test(text)) return true;
	const kind = readTimeText(text, '.').kind;
	return kind === 'colon' || kind === 'worded' || kind === 'stamp' || kind === 'serial';
}

/** Begins a table: at least one number, at least two values, and not the mean of the rows above. */
export const isDataRow = (look: RowLook): boolean =>
	look.numbers.length >= 1 &&
	look.values.length >= 2 &&
	!isFooterRow(look) &&
	look.texts.length <= look.values.length + 4;

/** "Time (h) | 1 | 2 | 3" above rows of numbers: the names of the columns are numbers, as compounds have them. */
export function isNumberedHeader(look: RowLook, below: RowLook | undefined): boolean {
	if (!below || look.texts.length !== 1 || look.lead === '' || !speaksOfTime(look.lead)) return false;
	return below.numbers.includes(look.first) && below.r - look.r <= 2;
}

/** Goes on in a table that has begun: any number inside its columns. */
export const continues = (look: RowLook, first: number, last: number): boolean =>
	!isFooterRow(look) &&
	!isHeaderRow(look) &&
	(look.numbers.some((c) => c >= first && c <= last) ||
		// "<LOQ" or "n.d." alone, behind a cell that holds something else or nothing: no legend.
		look.values.some((c) => c > first && c <= last && c > look.first));

export const isFooterRow = (look: RowLook): boolean =>
	look.lead !== '' && (isFooterWord(look.lead) || isLimitWord(look.lead));
export const isLimitRow = (look: RowLook): boolean => look.lead !== '' && isLimitWord(look.lead);

/** Names of columns, a word for time among them; compounds may be called "1a". */
export function isHeaderRow(look: RowLook): boolean {
	if (look.numbers.length > 0 || look.texts.length + look.values.length < 2) return false;
	return look.texts.some(({ text }) => speaksOfTime(text));
}

export function speaksOfTime(text: string): boolean {
	if (text.length > 60) return false;
	const { name, unit } = splitHeader(text);
	if (unit?.of === 'time' || unit?.of === 'duration')
		return !/\b(rt|rrt|ret)/i.test(name) && (name === '' || isTimeWord(name) || isClockWord(name));
	return isTimeWord(name || text) || isClockWord(name || text);
}
