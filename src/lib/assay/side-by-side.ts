/** Tables side by side: a band of rows is parted where a second time column begins a table of its own. */
import type { Band, FoundBlock } from './blocks';
import type { SheetView } from './grid';
import type { Headers } from './header-rows';
import { type RowLook, speaksOfTime } from './rows';
import { textsAbove, titleOf } from './titles';

/** Columns of one table. */
export const MOST_COLUMNS = 400;

interface Wide extends Band, Headers {
	floor: number;
}

/** Parts a band where a second time column begins a table of its own. */
export function sideBySide(view: SheetView, looks: RowLook[], band: Wide): FoundBlock[] {
	const rows = looks.slice(band.start, band.stop);
	const starts = timeColumns(view, band.headerRows, band.first, band.last);
	const filled = filledColumns(rows, band);
	const cuts = [band.first];
	for (let i = 1; i < starts.length; i++) {
		const between = filled.filter((c) => c > starts[i - 1] && c < starts[i]);
		// Sample names between "Time point" and "Time (min)" do not make two tables.
		if (between.some((c) => rows.some((look) => look.values.includes(c))))
			cuts.push(cutBefore(starts[i], filled, starts[i - 1]));
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
	const top = Math.min(...band.headerRows, ...band.limitRows, looks[band.start].r);
	const above = textsAbove(view, top, band.floor, parted ? { first, last } : null);
	return {
		block,
		headerRows: band.headerRows,
		limitRows: [...band.limitRows, ...band.limits],
		footerRows: band.footers,
		leftOutRows: band.leftOut.filter((r) => r > block.firstRow && r < block.lastRow),
		withinRows: band.within,
		title: titleOf(view, above),
		above
	};
}
