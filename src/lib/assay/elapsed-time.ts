/** Elapsed seconds of each reading of the time column; B14 notes what h:mm cannot show, B17 asks what "1:30" as text means. */
import type { ColumnHeader } from './columns';
import type { Examination } from './examination';
import { figure, someOf } from './wording';
import type { Sample } from './samples';
import { absoluteSeconds } from './stamps';
import { clockSeconds, isClock } from './time-of-day';
import type { UnitFound } from './time-unit';
import { clockText, daysToSeconds, secondsIn, type TimeReading } from './times';
import { SECONDS } from './units';

export function elapsed(
	ex: Examination,
	samples: Sample[],
	readings: TimeReading[],
	header: ColumnHeader | undefined,
	unit: UnitFound
): (number | null)[] {
	if (readings.some((r) => r.kind === 'stamp')) return absoluteSeconds(ex, samples, readings);
	const clock = isClock(ex, samples, readings, header);
	if (clock === null) return readings.map(() => null);
	if (clock) return clockSeconds(ex, samples, readings);
	const colon = colonForm(ex, samples, readings, header);
	const share = durationShare(ex, samples, readings, header);
	return readings.map((r) => {
		const seconds = secondsOf(r, unit, colon);
		if (r.kind !== 'serial' || seconds === null) return seconds;
		return share === null ? null : seconds / share;
	});
}

export function secondsOf(r: TimeReading, unit: UnitFound, colon: 'h:mm' | 'mm:ss' | null): number | null {
	if (r.kind === 'number') return unit.stated || r.value === 0 ? r.value * SECONDS[unit.unit] : null;
	if (r.kind === 'worded') return r.seconds;
	if (r.kind === 'serial') return daysToSeconds(r.days);
	if (r.kind !== 'colon') return null;
	if (r.parts.length === 3) return r.parts[0] * 3600 + r.parts[1] * 60 + r.parts[2];
	if (colon === null) return null;
	return colon === 'h:mm' ? r.parts[0] * 3600 + r.parts[1] * 60 : r.parts[0] * 60 + r.parts[1];
}

/** Durations below a header in min or s: 1:30 typed for 1 min 30 s is stored as 1 h 30 min. Divisor of the stored time; null while it is asked. */
function durationShare(
	ex: Examination,
	samples: Sample[],
	readings: TimeReading[],
	header: ColumnHeader | undefined
): number | null {
	const own = readings.flatMap((r, i) =>
		r.kind === 'serial' && r.days > 0 && !ex.isCorrected(samples[i].time.row, samples[i].time.column)
			? [i]
			: []
	);
	const unit = header?.unit?.of === 'time' ? header.unit.unit : null;
	if (own.length === 0 || (unit !== 'min' && unit !== 's')) return 1;
	const example = readings[own[0]] as TimeReading & { kind: 'serial' };
	const cell = ex.at(samples[own[0]].time.row, samples[own[0]].time.column);
	const minutes = secondsIn(daysToSeconds(example.days), 'min');
	const taken = ex.ask({
		rule: 'B17',
		level: 'ask',
		cells: own.map((i) => ex.at(samples[i].time.row, samples[i].time.column)),
		key: 'durations',
		found: `durations such as ${example.text} below a header in ${unit}`,
		expected: `plain numbers in ${unit}, or your word on what the durations are`,
		message: `${cell} is stored as ${clockText(minutes * 60)} (${figure(minutes)} min), and its header says ${unit}. Hours and minutes as stored, or minutes and seconds (${figure(minutes / 60)} min)?`,
		options: [
			{ key: 'h:mm', label: `Hours and minutes, as stored: ${figure(minutes)} min` },
			{ key: 'mm:ss', label: `Minutes and seconds: ${figure(minutes / 60)} min` }
		]
	});
	if (!taken) return null;
	if (taken.key === 'mm:ss')
		ex.conversions.push(`Durations such as ${example.text} in ${cell} read as minutes and seconds.`);
	return taken.key === 'mm:ss' ? 60 : 1;
}

/** "1:30" as text: hours and minutes, or minutes and seconds? The header tells, or the person. Typed corrections follow. */
function colonForm(
	ex: Examination,
	samples: Sample[],
	readings: TimeReading[],
	header: ColumnHeader | undefined
): 'h:mm' | 'mm:ss' | null {
	const two = readings.flatMap((r, i) => (r.kind === 'colon' && r.parts.length === 2 ? [i] : []));
	if (two.length === 0) return null;
	if (header?.unit?.of === 'duration') return header.unit.form;
	if (header?.unit?.of === 'time') return header.unit.unit === 'h' ? 'h:mm' : 'mm:ss';
	const own = two.filter((i) => !ex.isCorrected(samples[i].time.row, samples[i].time.column));
	if (own.length === 0) return 'h:mm';
	const text = (readings[own[0]] as { text: string }).text;
	const taken = ex.ask({
		rule: 'B17',
		level: 'ask',
		cells: own.map((i) => ex.at(samples[i].time.row, samples[i].time.column)),
		key: 'colon',
		found: `"${text}" as text`,
		expected: 'hours and minutes, or minutes and seconds',
		message: `Times such as "${text}" are text. Hours and minutes, or minutes and seconds?`,
		options: [
			{ key: 'h:mm', label: 'Hours and minutes' },
			{ key: 'mm:ss', label: 'Minutes and seconds' }
		]
	});
	return (taken?.key as 'h:mm' | 'mm:ss' | undefined) ?? null;
}

/** B14: what h:mm cannot show. */
export function noteWrapped(ex: Examination, samples: Sample[], readings: TimeReading[]): void {
	const wrapped = readings.flatMap((r, i) => {
		const s = samples[i];
		if (
			r.kind !== 'serial' ||
			!r.wraps ||
			r.days < 1 ||
			s.replicate > 0 ||
			ex.isCorrected(s.time.row, s.time.column)
		)
			return [];
		const seconds = daysToSeconds(r.days);
		return [
			{
				cell: ex.at(s.time.row, s.time.column),
				shown: r.text,
				stored: clockText(seconds),
				hours: figure(secondsIn(seconds, 'h'))
			}
		];
	});
	if (wrapped.length === 0) return;
	const [first, ...more] = wrapped;
	const also = more.length ? ` The same in ${someOf(more.map((w) => `${w.cell} (${w.hours} h)`))}.` : '';
	ex.note({
		rule: 'B14',
		cells: wrapped.map((w) => w.cell),
		key: first.cell,
		found: `shown as ${first.shown}, stored as ${first.stored}`,
		expected: 'a format that shows more than 24 h, such as [h]:mm',
		message: `${first.cell} is shown as ${first.shown}, stored as ${first.stored}; ${first.hours} h is used.${also}`
	});
}
