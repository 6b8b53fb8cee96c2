/** Date-time stamps (B16): elapsed time as a difference, with the zone asked where a clock change lies inside. */
import { clockChangeBetween, zoneOffsetsMin } from './clock-changes';
import type { Examination } from './examination';
import type { Sample } from './samples';
import { daysToSeconds, readTimeText, type TimeReading } from './times';

type Stamp = TimeReading & { kind: 'stamp' };

/** Elapsed seconds of each sample; null throughout while something is open. */
export function absoluteSeconds(
	ex: Examination,
	samples: Sample[],
	readings: TimeReading[]
): (number | null)[] {
	const cells = samples.map((s) => ex.at(s.time.row, s.time.column));
	const orders = settleOrder(ex, cells, readings);
	if (!orders) return readings.map(() => null);
	const days = readings.map((r) =>
		r.kind === 'stamp' ? (orders === 'month' ? (r.otherDays ?? r.days) : r.days) : NaN
	);
	const known = days.filter((d) => Number.isFinite(d));
	const zone = settleZone(ex, cells, readings, Math.min(...known), Math.max(...known));
	if (zone === null) return readings.map(() => null);
	const later = askDoubledHour(ex, cells, readings, days, zone);
	if (later === null) return readings.map(() => null);
	const seconds = days.map((d, i) => {
		const r = readings[i];
		if (r.kind !== 'stamp') return NaN;
		const offset = r.utcOffsetMin ?? offsetOf(d, zone, later.has(i));
		return daysToSeconds(d) - offset * 60;
	});
	const start = askStart(ex, cells[0], (readings[0] as Stamp).text, orders, zone);
	if (start === null) return readings.map(() => null);
	const zero = start === 'first' ? seconds[0] : start;
	return seconds.map((s) => (Number.isFinite(s) ? Math.round((s - zero) * 1000) / 1000 : null));
}

/** "03/04/2026": day first or month first? */
function settleOrder(ex: Examination, cells: string[], readings: TimeReading[]): 'day' | 'month' | null {
	const either = readings.flatMap((r, i) => (r.kind === 'stamp' && r.orders === 'either' ? [i] : []));
	if (either.length === 0) return 'day';
	const stamps = either.map((i) => readings[i] as Stamp);
	const sameDay = new Set(stamps.map((s) => Math.floor(s.days))).size === 1;
	// All on one date: the difference is the same either way.
	if (sameDay && either.length === readings.length) return 'day';
	const taken = ex.ask({
		rule: 'B16',
		level: 'ask',
		cells: either.map((i) => cells[i]),
		key: 'order',
		found: `dates such as "${stamps[0].text}"`,
		expected: 'which number is the day',
		message: `"${stamps[0].text}": is the day written first, or the month?`,
		options: [
			{ key: 'day', label: 'Day first' },
			{ key: 'month', label: 'Month first' }
		]
	});
	return (taken?.key as 'day' | 'month' | undefined) ?? null;
}

/** Zone to count in; '' when no clock change can matter; null while asked. */
function settleZone(
	ex: Examination,
	cells: string[],
	readings: TimeReading[],
	first: number,
	last: number
): string | null {
	if (readings.every((r) => r.kind !== 'stamp' || r.utcOffsetMin !== null)) return '';
	if (ex.mapping.timeZone) return ex.mapping.timeZone;
	const zones = clockChangeBetween(first, last);
	if (zones.length === 0) return '';
	const choices = [
		'Europe/London',
		'Europe/Berlin',
		'America/New_York',
		'America/Chicago',
		'America/Los_Angeles',
		'Australia/Sydney'
	]
		.concat(zones)
		.filter((zone, i, all) => all.indexOf(zone) === i)
		.map((zone) => ({ key: zone, label: zone.replace('_', ' ') }));
	const taken = ex.ask({
		rule: 'B16',
		level: 'ask',
		cells: [cells[0], cells[cells.length - 1]],
		key: 'zone',
		found: 'a change of the clocks between the first and the last stamp in some time zones',
		expected: 'the time zone of the stamps',
		message: 'The clocks may have changed while the run was going. In which time zone were the stamps taken?',
		options: [
			{ key: 'unchanged', label: 'The clock was not changed (one clock throughout)' },
			{
				key: 'zone',
				label: 'Time zone …',
				needsValue: [{ key: 'value', label: 'Time zone', kind: 'choice', choices }]
			}
		]
	});
	if (!taken) return null;
	if (taken.key === 'unchanged') return '';
	ex.mapping.timeZone = taken.text();
	ex.conversions.push(`Date-time stamps counted in the time zone ${taken.text()}.`);
	return taken.text();
}

function offsetOf(days: number, zone: string, later: boolean): number {
	if (zone === '') return 0;
	const offsets = zoneOffsetsMin(days, zone);
	return later ? offsets[offsets.length - 1] : offsets[0];
}

/** Stamps in the hour that a clock change doubles can mean two moments. Gives those that mean the later one; null while asked. */
function askDoubledHour(
	ex: Examination,
	cells: string[],
	readings: TimeReading[],
	days: number[],
	zone: string
): Set<number> | null {
	const later = new Set<number>();
	let open = false;
	readings.forEach((r, i) => {
		if (
			zone === '' ||
			r.kind !== 'stamp' ||
			r.utcOffsetMin !== null ||
			zoneOffsetsMin(days[i], zone).length < 2
		)
			return;
		const taken = ex.ask({
			rule: 'B16',
			level: 'ask',
			cells: [cells[i]],
			key: `doubled-${cells[i]}`,
			found: `${r.text}, an hour that the clocks showed twice`,
			expected: 'before or after the clocks were put back',
			message: `${cells[i]} ${r.text}: the clocks showed this hour twice. Before or after they were put back?`,
			options: [
				{ key: 'before', label: 'Before' },
				{ key: 'after', label: 'After' }
			]
		});
		if (!taken) open = true;
		else if (taken.key === 'after') later.add(i);
	});
	return open ? null : later;
}

function askStart(
	ex: Examination,
	cell: string,
	first: string,
	orders: 'day' | 'month',
	zone: string
): number | 'first' | null {
	const taken = ex.ask({
		rule: 'B16',
		level: 'ask',
		cells: [cell],
		key: 'start',
		found: `date-time stamps, the first ${first}`,
		expected: 'the moment that counts as time zero',
		message: `The column holds dates with times. Is the first, ${first}, time zero?`,
		options: [
			{ key: 'first', label: 'Yes, the first row is time zero' },
			{
				key: 'other',
				label: 'Time zero was at …',
				needsValue: [{ key: 'value', label: 'Date and time, for example 2026-12-01 09:40', kind: 'text' }]
			}
		]
	});
	if (!taken) return null;
	if (taken.key === 'first') {
		ex.conversions.push(`Elapsed time counted from the first stamp, ${first}.`);
		return 'first';
	}
	const reading = readTimeText(taken.text(), '.');
	if (reading.kind !== 'stamp') {
		ex.reopen(`"${taken.text()}" is not a date with a time. Write for example 2026-12-01 09:40.`);
		return null;
	}
	ex.conversions.push(`Elapsed time counted from ${taken.text()}.`);
	const days = orders === 'month' ? (reading.otherDays ?? reading.days) : reading.days;
	const offset = reading.utcOffsetMin ?? offsetOf(days, zone, false);
	return daysToSeconds(days) - offset * 60;
}
