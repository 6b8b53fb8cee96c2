/** One time in several columns, hours beside minutes and seconds: found by their headers and cells, put together where the person says so (B17). */
import type { ColumnMapping, TimeUnit } from '$lib/schemas/sheet';
import type { ColumnHeader } from './columns';
import type { Examination } from './examination';
import type { SheetView } from './grid';
import { readTime, secondsIn, type TimeReading } from './times';
import { SECONDS } from './units';
import { isRetention } from './words';
import { figure } from './wording';

export interface TimePart {
	column: number;
	unit: TimeUnit;
}

/** One reading of the parts' readings, in the unit of the first; a blank part beside a filled one counts nothing. */
export function joinTime(parts: TimePart[], readings: TimeReading[]): TimeReading {
	const odd = readings.find((r) => r.kind !== 'number' && r.kind !== 'blank');
	if (odd) return odd;
	if (readings.every((r) => r.kind === 'blank')) return { kind: 'blank' };
	const seconds = readings.reduce(
		(sum, r, i) => sum + (r.kind === 'number' ? r.value * SECONDS[parts[i].unit] : 0),
		0
	);
	return { kind: 'number', value: secondsIn(seconds, parts[0].unit) };
}

const unitOf = (h: ColumnHeader | undefined): TimeUnit | null =>
	h?.unit?.of === 'time' && !isRetention(h.header) ? h.unit.unit : null;

/** Columns right behind the time column that hold its smaller parts: their unit goes down, and no part reaches the next larger one. */
export function partsBehind(
	view: SheetView,
	rows: number[],
	headers: ColumnHeader[],
	time: number
): TimePart[] {
	const byColumn = new Map(headers.map((h) => [h.column, h]));
	const first = unitOf(byColumn.get(time));
	if (!first) return [];
	const parts: TimePart[] = [{ column: time, unit: first }];
	for (let column = time + 1; ; column++) {
		const unit = unitOf(byColumn.get(column));
		const before = parts[parts.length - 1].unit;
		if (!unit || SECONDS[unit] >= SECONDS[before]) break;
		if (!staysBelow(view, rows, column, SECONDS[before] / SECONDS[unit])) break;
		parts.push({ column, unit });
	}
	return parts.length > 1 ? parts : [];
}

function staysBelow(view: SheetView, rows: number[], column: number, limit: number): boolean {
	let numbers = 0;
	for (const row of rows) {
		const reading = readTime(view.workbook, view.mergedCell(row, column), null);
		if (reading.kind === 'blank') continue;
		if (reading.kind !== 'number' || reading.value < 0 || reading.value >= limit) return false;
		numbers++;
	}
	return numbers > 0;
}

/** B17: two or more columns marked as time. Asked before anything is read of them; meanwhile they are shown as put together. */
export function settleTimeParts(ex: Examination, rows: number[]): void {
	const marked = ex.mapping.columns.filter((c) => c.role === 'time');
	if (marked.length < 2) return;
	const parts = marked
		.flatMap((c) => (isUnit(c.unit) ? [{ column: c.column, unit: c.unit }] : []))
		.sort((a, b) => SECONDS[b.unit] - SECONDS[a.unit]);
	const distinct = new Set(parts.map((p) => p.unit)).size === marked.length;
	const { places } = ex;
	const names = marked.map((c) => `${places.series(c.column)}${c.unit ? ` (${c.unit})` : ''}`).join(' and ');
	const example = distinct ? exampleOf(ex, rows, parts) : '';
	const taken = ex.ask({
		rule: 'B17',
		level: 'ask',
		cells: marked.map((c) => ex.at(ex.mapping.headerRows.at(-1) ?? ex.mapping.block.firstRow, c.column)),
		key: 'time-columns',
		found: `times in ${names}`,
		expected: 'one time for each sample',
		message: distinct
			? `Times stand in ${names}. One time made of both${example}, or is only one of them the time?`.replace(
					'both',
					marked.length === 2 ? 'both' : 'all'
				)
			: `Times stand in ${names}. Which one is the time of the samples?`,
		options: [
			...(distinct
				? [{ key: 'together', label: `One time made of ${marked.length === 2 ? 'both' : 'all'}` }]
				: []),
			...marked.map((c) => ({
				key: `use:${places.mark(c.column)}`,
				label: `Only ${places.series(c.column)}`
			}))
		]
	});
	if (taken && taken.key !== 'together') {
		for (const c of marked) if (taken.key !== `use:${places.mark(c.column)}`) c.role = 'ignore';
		ex.conversions.push(`Times read from ${places.series(onlyTime(ex))} only, of ${names}.`);
		return;
	}
	if (distinct) ex.timeParts = parts;
	if (taken) ex.conversions.push(`Times of ${names} added up to one time in ${parts[0].unit}${example}.`);
}

const onlyTime = (ex: Examination) => ex.mapping.columns.find((c) => c.role === 'time')?.column ?? 0;

const isUnit = (unit: ColumnMapping['unit']): unit is TimeUnit =>
	unit !== null && Object.hasOwn(SECONDS, unit);

/** "; 1 | 30 = 1.5 h", of the first row where more than one part counts. */
function exampleOf(ex: Examination, rows: number[], parts: TimePart[]): string {
	for (const row of rows) {
		const readings = parts.map((p) => ex.time(row, p.column));
		const numbers = readings.map((r) => (r.kind === 'number' ? r.value : 0));
		if (numbers.filter((n) => n > 0).length < 2) continue;
		const joined = joinTime(parts, readings);
		if (joined.kind === 'number')
			return ` (${numbers.map(figure).join(' | ')} = ${figure(joined.value)} ${parts[0].unit})`;
	}
	return '';
}
