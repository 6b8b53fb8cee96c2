/** Rules about the time column: B14 to B18. Gives every sample its elapsed time, in the column's unit. */
import { TIME_UNITS, type Block, type TimeUnit } from '$lib/schemas/sheet';
import { headerCell } from './channels';
import type { ColumnHeader } from './columns';
import { ENTER, figure, plural, someOf, type Examination } from './examination';
import { address, columnLetter } from './grid';
import { timeColumn, type Sample } from './samples';
import { clockText, daysToSeconds, secondsIn, type TimeReading } from './times';
import { absoluteSeconds } from './stamps';
import { SECONDS } from './units';
import { isClockWord } from './words';

export interface Timed {
	sample: Sample;
	/** Elapsed seconds, or null while a finding on the cell is open. */
	seconds: number | null;
	/** Elapsed time as written, where the column holds plain numbers in the run's unit. */
	plain: number | null;
}

export interface Times {
	unit: TimeUnit;
	samples: Timed[];
	/** Rows from here on are a run of their own, as the person said. */
	rest: Block | null;
}

export function settleTimes(ex: Examination, samples: Sample[], headers: Map<number, ColumnHeader>): Times {
	const column = timeColumn(ex);
	const header = headers.get(column);
	const kept = dropUnreadable(ex, samples);
	const readings = kept.map((s) => ex.time(s.time.row, s.time.column));
	stopMixedKinds(ex, kept, readings, column);
	const unit = timeUnit(ex, kept, readings, header, column);
	const seconds = elapsed(ex, kept, readings, header, unit);
	const timed: Timed[] = kept.map((sample, i) => {
		const reading = readings[i];
		const plain = reading.kind === 'number' && unit.stated ? reading.value : null;
		return { sample, seconds: seconds[i], plain };
	});
	noteWrapped(ex, kept, readings);
	const { samples: ordered, rest } = stopBackwards(ex, timed, unit.unit);
	return { unit: unit.unit, samples: ordered, rest };
}

/** Cells of the time column that are blank, errors or text: one question each, the row can be left out. */
function dropUnreadable(ex: Examination, samples: Sample[]): Sample[] {
	const kept: Sample[] = [];
	const asked = new Set<number>();
	for (const s of samples) {
		const reading = ex.time(s.time.row, s.time.column);
		if (reading.kind !== 'blank' && reading.kind !== 'error' && reading.kind !== 'text') {
			kept.push(s);
			continue;
		}
		if (asked.has(s.time.row)) continue;
		asked.add(s.time.row);
		if (askTimeCell(ex, s, reading)) kept.push(...samples.filter((other) => other.time.row === s.time.row));
	}
	return kept;
}

/** True when the cell has a time after the answer. */
function askTimeCell(ex: Examination, s: Sample, reading: TimeReading): boolean {
	const cell = address(s.time.row, s.time.column);
	const shown = ex.shown(s.time.row, s.time.column);
	const found = reading.kind === 'blank' ? 'no time' : `"${shown.slice(0, 60)}"`;
	const taken = ex.ask({
		rule: reading.kind === 'error' ? 'B25' : 'B18',
		level: 'stop',
		cells: [cell],
		found,
		expected: 'a time',
		message:
			reading.kind === 'blank'
				? `Row ${s.row} has values but no time in ${cell}.`
				: `${cell} holds ${found} where a time is expected.`,
		options: [ENTER('Enter the time'), { key: 'leave-out', label: 'Leave the row out' }]
	});
	if (taken?.key === 'leave-out')
		ex.conversions.push(`Row ${s.row} left out: ${found} in ${cell}${because(taken.reason)}.`);
	if (taken?.key !== 'enter') return false;
	ex.correct(cell, taken.text(), taken.reason ?? `Time entered for row ${s.row}, which held ${found}.`);
	const again = ex.time(s.time.row, s.time.column);
	if (again.kind !== 'blank' && again.kind !== 'text' && again.kind !== 'error') return true;
	ex.reopen(`"${taken.text()}" is not a time.`);
	return false;
}

export const because = (reason: string | undefined): string => (reason ? ` (${reason})` : '');

const family = (r: TimeReading): string =>
	r.kind === 'serial' || r.kind === 'colon'
		? 'durations'
		: r.kind === 'stamp'
			? 'dates with time'
			: r.kind === 'worded'
				? 'times with their unit'
				: 'plain numbers';

/** B17: a column holds one kind of time; corrections are typed and may differ. */
function stopMixedKinds(ex: Examination, samples: Sample[], readings: TimeReading[], column: number): void {
	const kinds = new Map<string, string[]>();
	samples.forEach((s, i) => {
		if (ex.isCorrected(s.time.row, s.time.column)) return;
		if (readings[i].kind === 'number' && (readings[i] as { value: number }).value === 0) return;
		const cells = kinds.get(family(readings[i])) ?? [];
		cells.push(address(s.time.row, s.time.column));
		kinds.set(family(readings[i]), cells);
	});
	// Plain numbers beside times with their unit are asked about by `timeUnit`.
	const mixed = [...kinds].filter(([kind]) => kind !== 'times with their unit');
	if (mixed.length < 2) return;
	const what = mixed.map(([kind, cells]) => `${kind} (${someOf(cells, 2)})`).join(' and ');
	ex.ask({
		rule: 'B17',
		level: 'stop',
		cells: mixed.sort((a, b) => a[1].length - b[1].length)[0][1],
		key: 'kinds',
		found: what,
		expected: 'one kind of time in the column',
		message: `Column ${columnLetter(column)} mixes ${what}. Correct the cells that differ, or leave their rows out.`
	});
}

interface UnitFound {
	unit: TimeUnit;
	/** The column holds plain numbers in this unit. */
	stated: boolean;
}

function timeUnit(
	ex: Examination,
	samples: Sample[],
	readings: TimeReading[],
	header: ColumnHeader | undefined,
	column: number
): UnitFound {
	const mapped = ex.mapping.columns.find((c) => c.role === 'time');
	const stated = TIME_UNITS.includes(mapped?.unit as TimeUnit) ? (mapped?.unit as TimeUnit) : null;
	const plain = samples.filter((_, i) => readings[i].kind === 'number');
	const worded = readings.flatMap((r, i) => (r.kind === 'worded' ? [{ r, s: samples[i] }] : []));
	const serial = readings.some((r) => r.kind === 'serial' || r.kind === 'colon' || r.kind === 'stamp');
	if (worded.length > 0) return wordedUnit(ex, worded, stated, plain.length, column);
	if (serial) return { unit: 'h', stated: false };
	if (stated) return { unit: stated, stated: true };
	const taken = ex.ask({
		rule: 'B4',
		level: 'stop',
		cells: [headerCell(ex, column)],
		found: `time column ${columnLetter(column)}${header?.header ? `, "${header.header}",` : ''} without a unit`,
		expected: 's, min, h or d',
		message: `Time column ${columnLetter(column)} has no unit. Choose one; we will not assume.`,
		options: TIME_UNITS.map((unit) => ({ key: unit, label: unit }))
	});
	if (!taken) return { unit: 'h', stated: false };
	if (mapped) mapped.unit = taken.key;
	ex.conversions.push(`Unit of time column ${columnLetter(column)}: ${taken.key}, as chosen.`);
	return { unit: taken.key as TimeUnit, stated: true };
}

/** B17: times that carry their unit, against the column's unit or against each other. */
function wordedUnit(
	ex: Examination,
	worded: { r: TimeReading & { kind: 'worded' }; s: Sample }[],
	stated: TimeUnit | null,
	plain: number,
	column: number
): UnitFound {
	const units = new Set(worded.flatMap(({ r }) => r.units));
	const target = stated ?? (units.has('h') ? 'h' : [...units][0]);
	const cells = worded.map(({ s }) => address(s.time.row, s.time.column));
	const foreign = stated ? worded.some(({ r }) => r.units.some((u) => u !== stated)) : units.size > 1;
	if (!stated && plain > 0) {
		ex.ask({
			rule: 'B17',
			level: 'stop',
			cells,
			key: 'plain',
			found: `${plural(plain, 'plain number')} beside times with their unit`,
			expected: 'one unit for the column',
			message: `Column ${columnLetter(column)} holds plain numbers and times such as "${worded[0].r.text}". Set the column's unit, or correct the cells that differ.`
		});
		return { unit: target, stated: false };
	}
	if (foreign) {
		const example = stated ? worded.find(({ r }) => r.units.some((u) => u !== stated)) : worded[0];
		ex.ask({
			rule: 'B17',
			level: stated ? 'ask' : 'stop',
			cells,
			key: 'units',
			found: `"${example?.r.text}" in a column in ${stated ?? [...units].join(' and ')}`,
			expected: `times in ${target}`,
			message: stated
				? `"${example?.r.text}" stands in a column in ${stated}. Convert it to ${stated} by its own unit?`
				: `Column ${columnLetter(column)} mixes time units (${[...units].join(', ')}). Convert each time by its own unit to ${target}?`,
			options: [{ key: 'convert', label: `Convert to ${target}` }]
		});
	}
	ex.conversions.push(
		`${plural(worded.length, 'time')} read with its own unit and given in ${target} (${someOf(cells)}).`
	);
	return { unit: target, stated: true };
}

/* ---------------------------------------------------------------- elapsed seconds */

function elapsed(
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
	return readings.map((r) => secondsOf(r, unit, colon));
}

function secondsOf(r: TimeReading, unit: UnitFound, colon: 'h:mm' | 'mm:ss' | null): number | null {
	if (r.kind === 'number') return unit.stated || r.value === 0 ? r.value * SECONDS[unit.unit] : null;
	if (r.kind === 'worded') return r.seconds;
	if (r.kind === 'serial') return daysToSeconds(r.days);
	if (r.kind !== 'colon') return null;
	if (r.parts.length === 3) return r.parts[0] * 3600 + r.parts[1] * 60 + r.parts[2];
	if (colon === null) return null;
	return colon === 'h:mm' ? r.parts[0] * 3600 + r.parts[1] * 60 : r.parts[0] * 60 + r.parts[1];
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
		cells: own.map((i) => address(samples[i].time.row, samples[i].time.column)),
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

/** B15: are these times of day? True, false, or null while that is asked. */
function isClock(
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
	const cell = (i: number) => address(samples[i].time.row, samples[i].time.column);
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

function clockSeconds(ex: Examination, samples: Sample[], readings: TimeReading[]): (number | null)[] {
	const cells = samples.map((s) => address(s.time.row, s.time.column));
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
		.flatMap((row) => row.c.map((c) => ({ at: address(row.r, c[0]), m: stated.exec(String(c[1] ?? '')) })))
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

/** B14: what h:mm cannot show. */
function noteWrapped(ex: Examination, samples: Sample[], readings: TimeReading[]): void {
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
				cell: address(s.time.row, s.time.column),
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
		message: `${first.cell} is shown as ${first.shown}, stored as ${first.stored}; ${first.hours} h is used.${also}`
	});
}

/* ---------------------------------------------------------------- order, B18 */

function stopBackwards(
	ex: Examination,
	timed: Timed[],
	unit: TimeUnit
): { samples: Timed[]; rest: Block | null } {
	const kept: Timed[] = [];
	let latest = -Infinity;
	let latestText = '';
	let rest: Block | null = null;
	for (let i = 0; i < timed.length && !rest; i++) {
		const t = timed[i];
		if (t.seconds === null) {
			kept.push(t);
			continue;
		}
		if (t.seconds >= latest || t.sample.replicate > 0) {
			latest = Math.max(latest, t.seconds);
			latestText = showTime(ex, t);
			kept.push(t);
			continue;
		}
		const outcome = askBackwards(ex, timed, i, latest, latestText, unit);
		if (outcome === 'leave-out') continue;
		if (outcome === 'new-run') rest = { ...ex.mapping.block, firstRow: t.sample.row };
		else {
			if (outcome === 'open') t.seconds = null;
			kept.push(t);
			if (outcome === 'corrected') latest = Math.max(latest, t.seconds ?? latest);
		}
	}
	return { samples: kept, rest };
}

const showTime = (ex: Examination, t: Timed): string =>
	ex.shown(t.sample.time.row, t.sample.time.column) || 'the row above';

function askBackwards(
	ex: Examination,
	timed: Timed[],
	i: number,
	latest: number,
	latestText: string,
	unit: TimeUnit
): 'corrected' | 'keep' | 'leave-out' | 'new-run' | 'open' {
	const t = timed[i];
	const { row, column } = t.sample.time;
	const cell = address(row, column);
	const shown = showTime(ex, t);
	const next =
		timed.slice(i + 1).find((n) => n.seconds !== null && n.sample.row !== t.sample.row)?.seconds ?? null;
	const guess = likelyTime(shown, latest, next);
	const taken = ex.ask({
		rule: 'B18',
		level: 'stop',
		cells: [cell],
		found: `${shown} after ${latestText}`,
		expected: 'times that increase',
		message: `${cell} ${shown} comes after ${latestText}. Typing error${guess ? ` (${guess}?)` : ''} or a new run?`,
		options: [
			{
				key: 'enter',
				label: 'Enter the time',
				needsValue: [
					{
						key: 'value',
						label: 'Time',
						kind: 'text',
						...(guess ? { suggested: guess, source: 'digits of the cell in another order' } : {})
					}
				]
			},
			{ key: 'new-run', label: 'A new run starts here' },
			{ key: 'leave-out', label: 'Leave the row out' },
			{ key: 'keep', label: `Keep ${shown} as it stands` }
		]
	});
	if (taken?.key === 'enter')
		return enterTime(ex, t, cell, taken.text(), taken.reason, unit, shown, latestText);
	if (taken?.key === 'leave-out') {
		ex.conversions.push(
			`Row ${t.sample.row} left out: ${shown} comes after ${latestText}${because(taken.reason)}.`
		);
		return 'leave-out';
	}
	if (taken?.key === 'keep')
		ex.conversions.push(
			`${cell} kept at ${shown} although it comes after ${latestText}${because(taken.reason)}.`
		);
	if (taken?.key === 'new-run')
		ex.conversions.push(`A new run begins in row ${t.sample.row}; this run ends above it.`);
	return (taken?.key as 'keep' | 'new-run' | undefined) ?? 'open';
}

function enterTime(
	ex: Examination,
	t: Timed,
	cell: string,
	text: string,
	reason: string | undefined,
	unit: TimeUnit,
	shown: string,
	latestText: string
): 'corrected' | 'open' {
	ex.correct(cell, text, reason ?? `Typing error: ${shown} comes after ${latestText}.`);
	const reading = ex.time(t.sample.time.row, t.sample.time.column);
	const seconds = secondsOf(reading, { unit, stated: true }, 'h:mm');
	if (seconds === null) {
		ex.reopen(`"${text}" is not a time.`);
		return 'open';
	}
	t.seconds = seconds;
	t.plain = reading.kind === 'number' ? reading.value : null;
	return 'corrected';
}

/** "0:03" between 2:00 and 4:00 may be 3:00: hours and minutes swapped. Offered, never used by itself. */
function likelyTime(shown: string, after: number, before: number | null): string | null {
	const m = /^(\d{1,2}):(\d{2})$/.exec(shown);
	if (!m) return null;
	const swapped = `${Number(m[2])}:${m[1].padStart(2, '0')}`;
	const seconds = Number(m[2]) * 3600 + Number(m[1]) * 60;
	return seconds > after && (before === null || seconds < before) ? swapped : null;
}
