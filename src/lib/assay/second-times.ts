/** B17: a second column of times that says the same but for single rows: one of the two is a typing error there. */
import type { TimeUnit } from '$lib/schemas/sheet';
import type { ColumnHeader } from './columns';
import { secondsOf } from './elapsed-time';
import type { Examination } from './examination';
import { timeColumn } from './samples';
import { secondsIn } from './times';
import { SECONDS } from './units';
import { because, capital, figure, someOf } from './wording';

/** Part of a time, or of the larger of the two units, by which rounded times differ. */
const ROUNDING = { share: 0.02, unit: 0.051 };

const unitOf = (h: ColumnHeader | undefined): TimeUnit | null =>
	h?.unit?.of === 'time' ? h.unit.unit : null;

export function askSecondTimes(ex: Examination, rows: number[], headers: Map<number, ColumnHeader>): void {
	const main = timeColumn(ex);
	const unit = ex.mapping.columns.find((c) => c.role === 'time')?.unit as TimeUnit | null | undefined;
	if (main === 0 || !unit || !Object.hasOwn(SECONDS, unit) || ex.timeParts.length > 0) return;
	for (const c of ex.mapping.columns) {
		const other = c.role === 'ignore' ? unitOf(headers.get(c.column)) : null;
		if (other) compare(ex, rows, { column: main, unit }, { column: c.column, unit: other });
	}
}

interface Series {
	column: number;
	unit: TimeUnit;
}

function compare(ex: Examination, rows: number[], main: Series, other: Series): void {
	const seconds = (row: number, s: Series) =>
		secondsOf(ex.time(row, s.column), { unit: s.unit, stated: true }, null);
	const coarse = Math.max(SECONDS[main.unit], SECONDS[other.unit]);
	const differ: { row: number; seconds: number }[] = [];
	let agree = 0;
	for (const row of rows) {
		const [a, b] = [seconds(row, main), seconds(row, other)];
		if (a === null || b === null || (a === 0 && b === 0)) continue;
		const margin = Math.max(ROUNDING.share * Math.max(Math.abs(a), Math.abs(b)), ROUNDING.unit * coarse);
		if (Math.abs(a - b) <= margin) agree++;
		else differ.push({ row, seconds: b });
	}
	// Columns that mostly differ hold different things: retention times, times of work-up.
	if (differ.length === 0 || agree < 2 || agree <= differ.length) return;
	ask(ex, main, other, differ);
}

function ask(ex: Examination, main: Series, other: Series, differ: { row: number; seconds: number }[]): void {
	const cells = differ.flatMap((d) => [ex.at(d.row, main.column), ex.at(d.row, other.column)]);
	const [a, b] = [ex.places.series(main.column), ex.places.series(other.column)];
	const [first] = differ;
	const said = `${ex.at(first.row, main.column)} says ${ex.shown(first.row, main.column)} ${main.unit}, ${ex.at(first.row, other.column)} ${ex.shown(first.row, other.column)} ${other.unit}`;
	const also = differ.length > 1 ? `, and ${ex.places.samples(differ.slice(1).map((d) => d.row))} alike` : '';
	const taken = ex.ask({
		rule: 'B17',
		level: 'ask',
		cells,
		key: `second-${ex.places.mark(other.column)}`,
		found: said,
		expected: 'the same time in both',
		message: `${said}${also}; elsewhere the two agree. Which counts?`,
		options: [
			{ key: 'first', label: `${capital(a)} counts` },
			{
				key: 'second',
				label: `${capital(b)} counts there: ${figure(secondsIn(first.seconds, main.unit))} ${main.unit}`
			}
		]
	});
	if (!taken) return;
	if (taken.key === 'second')
		for (const d of differ)
			ex.correctTime(
				d.row,
				main.column,
				`${secondsIn(d.seconds, main.unit)} ${main.unit}`,
				taken.reason ?? `Time of ${b}, with which ${a} agrees elsewhere.`
			);
	ex.conversions.push(
		`${someOf(cells, 8)}: ${taken.key === 'second' ? b : a} counts, where the two columns of times differ${because(taken.reason)}.`
	);
}
