/** The header rows above a table: unit row, names, super-headers; titles and conditions are not among them. */
import type { Band } from './blocks';
import type { SheetView } from './grid';
import { isLimitRow, type RowLook, speaksOfTime } from './rows';
import { splitHeader } from './units';

export interface Headers {
	headerRows: number[];
	limitRows: number[];
}

const MOST_HEADERS = 4;

/** Walks up from the first data row: unit row, names, super-headers; stops at titles and conditions. */
export function headersAbove(
	view: SheetView,
	looks: RowLook[],
	start: number,
	used: number,
	band: Band
): Headers {
	const headerRows: number[] = [];
	const limitRows: number[] = [];
	let below = looks[start].r;
	let needMore = true;
	let timeSeen = false;
	for (let k = start - 1; k >= used && headerRows.length < MOST_HEADERS; k--) {
		const look = looks[k];
		const gap = below - look.r - 1;
		if (gap > (headerRows.length === 0 ? 1 : 0)) break;
		if (isLimitRow(look)) {
			if (look.values.length > 0) limitRows.push(look.r);
			below = look.r;
			continue;
		}
		if (look.texts.length === 0) break;
		const title = isTitle(view, look, band);
		const units = look.units > 0 && look.units === look.texts.length;
		const speaks = look.texts.some(({ text }) => speaksOfTime(text));
		const upper = headerRows.length > 0;
		if (title && !(speaks && !upper && !view.mergeAt(look.r, look.first))) break;
		if (upper && !needMore && !(speaks && !timeSeen) && !isSuper(view, look, band)) break;
		headerRows.unshift(look.r);
		timeSeen ||= speaks && !units;
		needMore = units || !coversData(look, looks[start]);
		below = look.r;
	}
	// Limits may stand above the names as well.
	for (let k = looks.findIndex((l) => l.r === headerRows[0]) - 1; k >= used && isLimitRow(looks[k]); k--)
		if (looks[k].values.length > 0) limitRows.push(looks[k].r);
	return { headerRows, limitRows };
}

/** One cell, or one merged over the whole width: a title, not a header. */
function isTitle(view: SheetView, look: RowLook, band: Band): boolean {
	if (look.texts.length + look.values.length > 1) return false;
	const merge = view.mergeAt(look.r, look.first);
	if (!merge)
		return (
			band.last > band.first && look.texts.length === 1 && !isSuperText(look.texts[0]?.text ?? '', look, band)
		);
	return merge[1] <= band.first + 0 && merge[3] >= band.last;
}

/** A single unmerged text over the second or a later column that names a quantity: "Area %" over the block. */
function isSuperText(text: string, look: RowLook, band: Band): boolean {
	return look.first > band.first && look.first <= band.last && splitHeader(text).unit !== null;
}

/** Names over spans of columns, or quantities with units, above the names proper. */
function isSuper(view: SheetView, look: RowLook, band: Band): boolean {
	const inside = look.texts.filter(({ column }) => column >= band.first && column <= band.last);
	if (inside.length === 0 || look.numbers.length > 0) return false;
	return inside.some(({ column, text }) => {
		const merge = view.mergeAt(look.r, column);
		if (merge && merge[3] > merge[1]) return true;
		const unit = splitHeader(text).unit;
		return unit !== null && unit.of !== 'time' && !/\d/.test(text);
	});
}

/** Names above at least half of the columns that hold values. */
function coversData(header: RowLook, data: RowLook): boolean {
	const named = new Set([...header.texts.map((t) => t.column), ...header.values]);
	const columns = [...data.values, ...data.texts.map((t) => t.column)];
	return columns.filter((c) => named.has(c)).length * 2 >= columns.length;
}
