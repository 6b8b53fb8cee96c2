/**
 * Finds the tables of a sheet: runs of data rows, the header rows above them, the footers below, side by side where the time
 * column begins anew. Rule B1 lets the person correct the outcome, so this proposes and never decides.
 */
import type { Block } from '$lib/schemas/sheet';
import type { SheetView } from './grid';
import { headersAbove } from './header-rows';
import {
	continues,
	isDataRow,
	isFooterRow,
	isHeaderRow,
	isLimitRow,
	isNumberedHeader,
	lookAt,
	type RowLook,
	speaksOfTime
} from './rows';
import { readTime } from './times';
import { isTotalsRow } from './totals';
import { sideBySide } from './side-by-side';
import type { TextLine } from './titles';

export interface FoundBlock {
	block: Block;
	headerRows: number[];
	/** Rows "LOQ", "LOD" directly above or below the data. */
	limitRows: number[];
	footerRows: { row: number; why: string }[];
	/** Rows inside the block without data, and those of them that hold means or spreads. */
	leftOutRows: number[];
	withinRows: number[];
	title: string;
	/** Texts above the table, nearest first, with their row; below it too where times run across. Rows of the sheet as received. */
	above: TextLine[];
}

/** At most this many tables of a sheet are offered. */
const MOST_TABLES = 40;

export function findBlocks(view: SheetView): FoundBlock[] {
	const looks = view.sheet.rows.map((row) => lookAt(view.workbook, row));
	const found: FoundBlock[] = [];
	let used = 0;
	for (let i = 0; i < looks.length && found.length < MOST_TABLES; i++) {
		if (!isDataRow(looks[i]) || isNumberedHeader(looks[i], looks[i + 1])) continue;
		const start = upwards(looks, i, used);
		const band = growBand(view, looks, start);
		const headers = headersAbove(view, looks, start, used, band);
		found.push(...sideBySide(view, looks, { ...band, ...headers, floor: used }));
		used = band.end;
		i = band.end - 1;
	}
	return found;
}

/** A row right above the first full one is its first sample, with a cell left blank, or with a text such as "O.5" below the word for time. */
function upwards(looks: RowLook[], start: number, floor: number): number {
	const { first, last } = looks[start];
	let k = start;
	while (
		k > floor &&
		looks[k - 1].r === looks[k].r - 1 &&
		looks[k - 1].numbers.some((c) => c >= first && c <= last) &&
		(looks[k - 1].texts.length === 0 || isBelowTime(looks, k - 1, floor))
	)
		k--;
	return k;
}

/** A number right below the word for time is a time, whatever the cells beside it hold: no row of the header. */
function isBelowTime(looks: RowLook[], k: number, floor: number): boolean {
	if (isFooterRow(looks[k])) return false;
	for (let j = k - 1; j >= floor && j >= k - 3 && looks[j].r === looks[j + 1].r - 1; j--)
		if (isHeaderRow(looks[j]))
			return looks[j].texts.some((t) => speaksOfTime(t.text) && looks[k].numbers.includes(t.column));
	return false;
}

export interface Band {
	/** Indexes into the looks: first data row, one past the last data row, one past the last footer. */
	start: number;
	stop: number;
	end: number;
	first: number;
	last: number;
	leftOut: number[];
	/** Means and spreads between the data rows. */
	within: number[];
	footers: { row: number; why: string }[];
	limits: number[];
}

/** Blank rows that a table may contain. */
const GAP = 2;

function growBand(view: SheetView, looks: RowLook[], start: number): Band {
	const band: Band = {
		start,
		stop: start + 1,
		end: start + 1,
		first: looks[start].first,
		last: looks[start].last,
		leftOut: [],
		within: [],
		footers: [],
		limits: []
	};
	while (band.stop < looks.length) {
		const look = looks[band.stop];
		const gap = look.r - looks[band.stop - 1].r - 1;
		const between = gap === 0 ? rowsBetween(view, looks, band) : 0;
		if (between > 0) {
			for (const row of looks.slice(band.stop, band.stop + between)) {
				band.leftOut.push(row.r);
				band.within.push(row.r);
			}
			band.stop += between;
			continue;
		}
		if (gap > GAP || (gap > 0 && !isDataRow(look)) || !continues(look, band.first, band.last)) break;
		if (isNumberedHeader(look, looks[band.stop + 1])) break;
		for (let r = look.r - gap; r < look.r; r++) band.leftOut.push(r);
		band.first = Math.min(band.first, look.first);
		band.last = Math.max(band.last, look.last);
		band.stop++;
	}
	setTotalsApart(view, looks, band);
	band.end = band.stop;
	takeFooters(view, looks, band);
	return band;
}

/** How many rows of means, remarks or repeated headers stand between the data rows here; none when no further data follow directly. */
function rowsBetween(view: SheetView, looks: RowLook[], band: Band): number {
	let n = 0;
	while (isBetween(view, looks, band, band.stop + n)) n++;
	if (n === 0 || n > MOST_BETWEEN) return 0;
	const after = looks[band.stop + n];
	const rows = looks.slice(band.stop - 1, band.stop + n + 1);
	const close = rows.every((look, i) => i === 0 || look.r === rows[i - 1].r + 1);
	return close && after && isDataRow(after) && continues(after, band.first, band.last) ? n : 0;
}

function isBetween(view: SheetView, looks: RowLook[], band: Band, k: number): boolean {
	const look = looks[k];
	if (!look || isLimitRow(look)) return false;
	if (isFooterRow(look)) return true;
	if (isHeaderRow(look)) return goesOn(view, looks, band, k);
	return look.values.length === 0 && look.texts.length > 0 && look.texts.length <= 2;
}

/** The header once more, as at the head of a printed page: the same names, and times that go on rising. */
function goesOn(view: SheetView, looks: RowLook[], band: Band, k: number): boolean {
	const head = looks[band.start - 1];
	const names = (look: RowLook) => JSON.stringify(look.texts);
	if (!head || !looks[k + 1] || names(head) !== names(looks[k])) return false;
	const column = head.texts.find(({ text }) => speaksOfTime(text))?.column ?? 0;
	const [before, after] = [looks[k - 1], looks[k + 1]].map((look) => {
		const reading = readTime(view.workbook, view.cell(look.r, column), null);
		return reading.kind === 'number' ? reading.value : reading.kind === 'serial' ? reading.days : NaN;
	});
	return after > before;
}

/** Rows of means and spreads after each group of samples, or of remarks. */
const MOST_BETWEEN = 4;

/** Sums or means of the rows above, such as the totals row of a table that names none: left to the footers, and asked about. */
function setTotalsApart(view: SheetView, looks: RowLook[], band: Band): void {
	const rows = looks.slice(band.start, band.stop).map((look) => look.r);
	while (band.stop - band.start > 3 && isTotalsRow(view, rows.slice(0, band.stop - band.start))) band.stop--;
}

function takeFooters(view: SheetView, looks: RowLook[], band: Band): void {
	const rows = looks.slice(band.start, band.stop).map((look) => look.r);
	while (band.end < looks.length) {
		const look = looks[band.end];
		const gap = look.r - looks[band.end - 1].r - 1;
		const totals = isTotalsRow(view, [...rows, look.r]);
		if (isHeaderRow(look) || (isDataRow(look) && !isFooterRow(look) && !totals) || gap > 1) return;
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
