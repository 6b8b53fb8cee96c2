/**
 * Finds the tables of a sheet: runs of data rows, the header rows above them, the footers below, side by side where the time
 * column begins anew. Rule B1 lets the person correct the outcome, so this proposes and never decides.
 */
import type { Block } from '$lib/schemas/sheet';
import { displayText, type SheetView } from './grid';
import {
	continues,
	isDataRow,
	isFooterRow,
	isHeaderRow,
	isLimitRow,
	lookAt,
	speaksOfTime,
	type RowLook
} from './rows';
import { readUnit, splitHeader } from './units';
import { isClockWord, isTimeWord } from './words';

export interface FoundBlock {
	block: Block;
	headerRows: number[];
	/** Rows "LOQ", "LOD" directly above or below the data. */
	limitRows: number[];
	footerRows: { row: number; why: string }[];
	/** Rows inside the block without data. */
	leftOutRows: number[];
	title: string;
	/** Texts above the table, nearest first, with their row. */
	above: { row: number; text: string }[];
}

/** At most this many tables of a sheet are offered. */
const MOST_TABLES = 40;
/** Columns of one table. */
export const MOST_COLUMNS = 400;

export function findBlocks(view: SheetView): FoundBlock[] {
	const looks = view.sheet.rows.map((row) => lookAt(view.workbook, row));
	const found: FoundBlock[] = [];
	let used = 0;
	for (let i = 0; i < looks.length && found.length < MOST_TABLES; i++) {
		if (!isDataRow(looks[i])) continue;
		const band = growBand(looks, i);
		const headers = headersAbove(view, looks, i, used, band);
		found.push(...sideBySide(view, looks, { ...band, ...headers, floor: used }));
		used = band.end;
		i = band.end - 1;
	}
	return found;
}

interface Band {
	/** Indexes into the looks: first data row, one past the last data row, one past the last footer. */
	start: number;
	stop: number;
	end: number;
	first: number;
	last: number;
	leftOut: number[];
	footers: { row: number; why: string }[];
	limits: number[];
}

/** Blank rows that a table may contain. */
const GAP = 2;

function growBand(looks: RowLook[], start: number): Band {
	const band: Band = {
		start,
		stop: start + 1,
		end: start + 1,
		first: looks[start].first,
		last: looks[start].last,
		leftOut: [],
		footers: [],
		limits: []
	};
	while (band.stop < looks.length) {
		const look = looks[band.stop];
		const gap = look.r - looks[band.stop - 1].r - 1;
		if (gap > GAP || (gap > 0 && !isDataRow(look)) || !continues(look, band.first, band.last)) break;
		for (let r = look.r - gap; r < look.r; r++) band.leftOut.push(r);
		band.first = Math.min(band.first, look.first);
		band.last = Math.max(band.last, look.last);
		band.stop++;
	}
	band.end = band.stop;
	takeFooters(looks, band);
	return band;
}

function takeFooters(looks: RowLook[], band: Band): void {
	while (band.end < looks.length) {
		const look = looks[band.end];
		const gap = look.r - looks[band.end - 1].r - 1;
		if (isHeaderRow(look) || (isDataRow(look) && !isFooterRow(look)) || gap > 1) return;
		if (gap === 1 && !isFooterRow(look)) return;
		// A lone text right before a header is that table's title.
		const next = looks[band.end + 1];
		if (next && isHeaderRow(next) && !isFooterRow(look) && next.r - look.r <= 1) return;
		if (isLimitRow(look)) band.limits.push(look.r);
		const why = isLimitRow(look)
			? 'limit'
			: isFooterRow(look) || look.numbers.length === 0
				? 'footer'
				: 'unsure';
		band.footers.push({ row: look.r, why });
		band.end++;
	}
}

interface Headers {
	headerRows: number[];
	limitRows: number[];
}

const MOST_HEADERS = 4;

/** Walks up from the first data row: unit row, names, super-headers; stops at titles and conditions. */
function headersAbove(view: SheetView, looks: RowLook[], start: number, used: number, band: Band): Headers {
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

interface Wide extends Band, Headers {
	floor: number;
}

/** Parts a band where a second time column begins a table of its own. */
function sideBySide(view: SheetView, looks: RowLook[], band: Wide): FoundBlock[] {
	const rows = looks.slice(band.start, band.stop);
	const starts = timeColumns(view, band.headerRows, band.first, band.last);
	const filled = filledColumns(rows, band);
	const cuts = [band.first];
	for (let i = 1; i < starts.length; i++) {
		const between = filled.filter((c) => c > starts[i - 1] && c < starts[i]);
		if (between.length > 0) cuts.push(cutBefore(starts[i], filled, starts[i - 1]));
	}
	return cuts.map((first, i) => {
		const last = i + 1 < cuts.length ? cuts[i + 1] - 1 : band.last;
		const own = filled.filter((c) => c >= first && c <= last);
		return oneTable(view, looks, band, rows, own[0] ?? first, own.at(-1) ?? last, cuts.length > 1);
	});
}

/** The part begins at its time column, or at sample columns that stand directly before it behind a blank one. */
function cutBefore(time: number, filled: number[], floor: number): number {
	let first = time;
	while (first - 1 > floor && filled.includes(first - 1)) first--;
	return first === floor + 1 ? time : first;
}

function timeColumns(view: SheetView, headerRows: number[], first: number, last: number): number[] {
	const found: number[] = [];
	for (let c = first; c <= last; c++) {
		const texts = headerRows.map((r) => view.text(r, c)).filter(Boolean);
		if (texts.some((text) => speaksOfTime(text))) found.push(c);
	}
	return found;
}

function filledColumns(rows: RowLook[], band: Wide): number[] {
	const filled = new Set<number>();
	for (const look of rows) {
		for (const c of look.values) filled.add(c);
		for (const { column } of look.texts) filled.add(column);
	}
	return [...filled].filter((c) => c >= band.first && c <= band.last).sort((a, b) => a - b);
}

function oneTable(
	view: SheetView,
	looks: RowLook[],
	band: Wide,
	rows: RowLook[],
	first: number,
	last: number,
	parted: boolean
): FoundBlock {
	const has = (look: RowLook) =>
		look.values.some((c) => c >= first && c <= last) ||
		look.texts.some((t) => t.column >= first && t.column <= last);
	const own = parted ? rows.filter(has) : rows;
	const kept = own.length > 0 ? own : rows;
	const block = {
		firstRow: kept[0].r,
		lastRow: kept[kept.length - 1].r,
		firstColumn: first,
		lastColumn: Math.min(last, first + MOST_COLUMNS - 1)
	};
	const above = textsAbove(view, looks, band, parted ? { first, last } : null);
	return {
		block,
		headerRows: band.headerRows,
		limitRows: [...band.limitRows, ...band.limits],
		footerRows: band.footers,
		leftOutRows: band.leftOut.filter((r) => r > block.firstRow && r < block.lastRow),
		title: titleOf(view, above),
		above
	};
}

function textsAbove(
	view: SheetView,
	looks: RowLook[],
	band: Wide,
	part: { first: number; last: number } | null
): { row: number; text: string }[] {
	const top = band.headerRows[0] ?? looks[band.start].r;
	const found: { row: number; text: string }[] = [];
	for (let k = looks.length - 1; k >= band.floor; k--) {
		const look = looks[k];
		if (look.r >= top || found.length >= 12) continue;
		const cells = view.cellsOfRow(look.r).filter((c) => !part || (c[0] >= part.first && c[0] <= part.last));
		const text = cells
			.map((c) => displayText(view.workbook, c).trim())
			.filter(Boolean)
			.join(' ');
		if (text) found.push({ row: look.r, text: text.slice(0, 200) });
	}
	return found;
}

/** The nearest line that reads like a title: one cell, or the first line of the sheet. */
function titleOf(view: SheetView, above: { row: number; text: string }[]): string {
	const lone = above.find(({ row }) => view.cellsOfRow(row).filter((c) => c[1] !== null).length === 1);
	return (lone ?? above[above.length - 1])?.text.slice(0, 120) ?? view.sheet.name;
}

/** The column that holds time by its header or unit; 0 when none says so. Elapsed time goes before times of day, those before dates. */
export function timeColumnByHeader(view: SheetView, headerRows: number[], block: Block): number {
	let best = 0;
	let bestRank = 0;
	for (let c = block.firstColumn; c <= block.lastColumn; c++) {
		const rank = timeRank(headerRows.map((r) => view.text(r, c)).filter(Boolean));
		if (rank > bestRank) [best, bestRank] = [c, rank];
	}
	return best;
}

function timeRank(texts: string[]): number {
	const bare = (text: string) => readUnit(text.replace(/^[([]|[)\]]$/g, ''));
	const named = texts.filter((text) => speaksOfTime(text));
	if (named.length === 0) return 0;
	const names = texts.map((text) => splitHeader(text).name).join(' ');
	// A lone "min" under another name ("RT", "Stirring") is that column's unit, not the time of the reaction.
	if (
		named.every((text) => bare(text)?.of === 'time') &&
		texts.some((text) => !bare(text) && !speaksOfTime(text))
	)
		return 0;
	if (isClockWord(names)) return isTimeWord(names) || /uhr|clock|heure|hora/i.test(names) ? 2 : 1;
	const unit = texts.some((text) =>
		['time', 'duration'].includes((splitHeader(text).unit ?? bare(text))?.of ?? '')
	);
	return unit ? 4 : 3;
}
