/** B15: times of day, counted from a start that the person states, over midnight where that is confirmed. */
import type { ColumnHeader } from './columns';
import type { Examination } from './examination';
import { plural } from './wording';
import type { Sample } from './samples';
import { clockText, daysToSeconds, type TimeReading } from './times';
import { isClockWord } from './words';

/** B15: are these times of day? True, false, or null while that is asked. */
export function isClock(
	ex: Examination,
	samples: Sample[],
	readings: TimeReading[],
	header: ColumnHeader | undefined
): boolean | null {
	const times = readings.flatMap((r, i) => (r.kind === 'serial' || r.kind === 'colon' ? [i] : []));
	if (times.length === 0) return false;
	if (readings.some((r) => r.kind === 'serial' && !r.wraps)) return false;
	if (header?.unit?.of === 'duration' || header?.unit?.of === 'time') return false;
	const name = header?.parts.join(' ') ?? '';
	if (isClockWord(name)) return true;
	const days = times.map((i) => dayFraction(readings[i]));
	const first = days[0];
	if (first === 0 || days.some((d) => d >= 1) || first < 1 / 24) return false;
	const cell = (i: number) => ex.at(samples[i].time.row, samples[i].time.column);
	const text = ex.shown(samples[times[0]].time.row, samples[times[0]].time.column);
	const taken = ex.ask({
		rule: 'B15',
		level: 'ask',
		cells: times.map(cell),
		key: 'clock',
		found: `times that begin at ${text}`,
		expected: 'elapsed time, or the time of day with a start',
		message: `The first time is ${text}. Time of day, or elapsed time?`,
		options: [
			{ key: 'clock', label: 'Time of day' },
			{ key: 'elapsed', label: 'Elapsed time' }
		]
	});
	return taken ? taken.key === 'clock' : null;
}

function dayFraction(r: TimeReading): number {
	if (r.kind === 'serial') return r.days;
	if (r.kind === 'colon') return (r.parts[0] * 3600 + r.parts[1] * 60 + (r.parts[2] ?? 0)) / 86_400;
	return NaN;
}

export function clockSeconds(ex: Examination, samples: Sample[], readings: TimeReading[]): (number | null)[] {
	const cells = samples.map((s) => ex.at(s.time.row, s.time.column));
	const ofDay = readings.map((r) => daysToSeconds(dayFraction(r)));
	const start = askStart(ex, cells[0], clockText(ofDay[0]));
	let day = 0;
	let open = false;
	const seconds = ofDay.map((s, i) => {
		const before = i === 0 ? (start ?? s) : ofDay[i - 1];
		if (s < before) {
			const next = askNextDay(ex, cells[i], clockText(s), clockText(before));
			if (next) day += 86_400;
			else if (next === null) open = true;
		}
		return s + day;
	});
	if (start === null || open) return seconds.map(() => null);
	ex.conversions.push(
		`Times of day turned into elapsed time from ${clockText(start)}${day ? `, over ${plural(day / 86_400, 'midnight')}` : ''}.`
	);
	return seconds.map((s) => s - start);
}

function askStart(ex: Examination, cell: string, first: string): number | null {
	const stated = /\b(?:start|begin|beginn|t0|d[ée]but)\D{0,12}(\d{1,2}:\d{2}(?::\d{2})?)/i;
	const title = ex.view.sheet.rows
		.filter((row) => row.r < ex.mapping.block.firstRow)
		.flatMap((row) => row.c.map((c) => ({ at: ex.at(row.r, c[0]), m: stated.exec(String(c[1] ?? '')) })))
		.find(({ m }) => m);
	const suggested = title?.m?.[1] ?? first;
	const taken = ex.ask({
		rule: 'B15',
		level: 'ask',
		cells: [cell],
		key: 'start',
		found: 'times of day',
		expected: 'the time of day that counts as time zero',
		message: 'The column holds times of day. When was time zero?',
		options: [
			{
				key: 'start',
				label: 'Time zero at …',
				needsValue: [
					{
						key: 'value',
						label: 'Time of day, hh:mm',
						kind: 'text',
						suggested,
						source: title ? title.at : `first row, ${cell}`
					}
				]
			}
		]
	});
	if (!taken) return null;
	const m = /^(\d{1,2}):(\d{2})(?::(\d{2}))?$/.exec(taken.text());
	if (m && Number(m[1]) < 24 && Number(m[2]) < 60)
		return Number(m[1]) * 3600 + Number(m[2]) * 60 + Number(m[3] ?? 0);
	ex.reopen(`"${taken.text()}" is not a time of day. Write for example 09:40.`);
	return null;
}

/** True: a day later; false: taken as it stands; null: open. */
function askNextDay(ex: Examination, cell: string, time: string, before: string): boolean | null {
	const taken = ex.ask({
		rule: 'B15',
		level: 'ask',
		cells: [cell],
		key: `midnight-${cell}`,
		found: `${time} after ${before}`,
		expected: 'times that increase',
		message: `${time} follows ${before}: next day?`,
		options: [
			{ key: 'next-day', label: 'Yes, the next day' },
			{ key: 'same-day', label: 'No, it is out of order' }
		]
	});
	return taken ? taken.key === 'next-day' : null;
}
