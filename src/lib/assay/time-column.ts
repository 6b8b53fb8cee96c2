/** Which column of a table holds the times: by header, by names such as "t=15 min", or by numbers that never decrease. */
import type { Block } from '$lib/schemas/sheet';
import type { SheetView } from './grid';
import { speaksOfTime } from './rows';
import type { FoundBlock } from './blocks';
import { timeInName } from './name-times';
import { readTime } from './times';
import { readUnit, splitHeader } from './units';
import { isClockWord, isTimeWord } from './words';

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
	// "Day | Time": the number of the day is no elapsed time where a time of day stands beside it.
	if (/^(day|tag|jour|d[ií]a|giorno|dag)s?$/i.test(texts.join(' ').trim())) return 1;
	if (isClockWord(names)) return isTimeWord(names) || /uhr|clock|heure|hora/i.test(names) ? 2 : 1;
	const unit = texts.some((text) =>
		['time', 'duration'].includes((splitHeader(text).unit ?? bare(text))?.of ?? '')
	);
	return unit ? 4 : 3;
}

export function timeColumnOf(view: SheetView, found: FoundBlock): number {
	const named = timeColumnByHeader(view, found.headerRows, found.block);
	if (named > 0) return named;
	// Names of samples that are or hold times, "t=15 min" or "RS-112, 2 h".
	for (let c = found.block.firstColumn; c <= found.block.lastColumn; c++)
		if (namesTimes(view, found, c)) return c;
	if (found.headerRows.length > 0) return 0;
	// Without any header, the first column of three or more numbers that never decrease.
	for (let c = found.block.firstColumn; c <= found.block.lastColumn; c++)
		if (increases(view, found, c)) return c;
	return 0;
}

function namesTimes(view: SheetView, found: FoundBlock, column: number): boolean {
	let times = 0;
	let others = 0;
	for (const r of view.filledRows(found.block.firstRow, found.block.lastRow)) {
		const cell = view.cell(r, column);
		if (typeof cell?.[1] !== 'string') continue;
		if (readTime(view.workbook, cell, null).kind === 'worded' || timeInName(cell[1], null)) times++;
		else others++;
	}
	return times >= 3 && times >= others * 4;
}

function increases(view: SheetView, found: FoundBlock, column: number): boolean {
	let before = -Infinity;
	let count = 0;
	for (const r of view.filledRows(found.block.firstRow, found.block.lastRow)) {
		const reading = readTime(view.workbook, view.cell(r, column), null);
		if (reading.kind === 'blank') continue;
		if (reading.kind !== 'number' && reading.kind !== 'serial') return false;
		const value = reading.kind === 'number' ? reading.value : reading.days;
		if (value < before) return false;
		before = value;
		count++;
	}
	return count >= 3;
}
