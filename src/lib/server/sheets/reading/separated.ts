/**
 * Rows of a text table (RFC 4180, with any one-character separator): quotes may hold separators, line ends and doubled quotes.
 * One row is held at a time and a cell is cut at its greatest length, so that memory does not follow what the text claims.
 */
import { CELL_TEXT } from './limits';

/** @param take is given each row in turn, blank ones included; it may throw to stop */
export function readRows(
	text: string,
	separator: string,
	mostColumns: number,
	take: (cells: string[]) => void
): void {
	let at = 0;
	while (at < text.length) {
		const row: string[] = [];
		at = readRow(text, at, separator, mostColumns, row);
		take(row);
	}
}

/** Fills `row` with the cells of the line at `at` and gives the place behind its end. */
function readRow(text: string, from: number, separator: string, mostColumns: number, row: string[]): number {
	let at = from;
	for (;;) {
		const cell = text[at] === '"' ? quoted(text, at) : bare(text, at, separator);
		if (row.length <= mostColumns) row.push(cell.value);
		at = cell.end;
		if (at >= text.length) return at;
		if (text[at] === separator) at++;
		else return text[at] === '\r' && text[at + 1] === '\n' ? at + 2 : at + 1;
	}
}

interface Cell {
	value: string;
	end: number;
}

function bare(text: string, from: number, separator: string): Cell {
	const mark = separator.charCodeAt(0);
	let at = from;
	for (; at < text.length; at++) {
		const code = text.charCodeAt(at);
		if (code === mark || code === 10 || code === 13) break;
	}
	return { value: text.slice(from, Math.min(at, from + CELL_TEXT)), end: at };
}

/** A quote that is never closed, or closed in the middle of a cell, is text like any other. */
function quoted(text: string, from: number): Cell {
	let value = '';
	let at = from + 1;
	for (;;) {
		const close = text.indexOf('"', at);
		if (close < 0) return toLineEnd(text, from);
		if (value.length <= CELL_TEXT) value += text.slice(at, Math.min(close, at + CELL_TEXT));
		if (text[close + 1] !== '"') {
			at = close + 1;
			break;
		}
		if (value.length <= CELL_TEXT) value += '"';
		at = close + 2;
	}
	return { value: value.slice(0, CELL_TEXT), end: at };
}

function toLineEnd(text: string, from: number): Cell {
	const line = text.indexOf('\n', from);
	const end = line < 0 ? text.length : line;
	return { value: text.slice(from, Math.min(end, from + CELL_TEXT)), end };
}
