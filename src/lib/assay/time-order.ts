/** B18: times increase; one that does not is a typing error, a row to leave out, or the first of a new run. */
import type { Block, TimeUnit } from '$lib/schemas/sheet';
import { secondsOf } from './elapsed-time';
import type { Examination } from './examination';
import { because, capital, someOf } from './wording';
import type { Timed } from './samples';

export function stopBackwards(
	ex: Examination,
	all: Timed[],
	unit: TimeUnit
): { samples: Timed[]; rest: Block | null } {
	const timed = askBeforeZero(ex, all);
	const turned = askDescending(ex, timed);
	if (turned) return { samples: turned, rest: null };
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
			// The rows below are compared with this one, so that one slip is one question.
			if (outcome !== 'corrected') [latest, latestText] = [t.seconds, showTime(ex, t)];
			if (outcome === 'open') t.seconds = null;
			kept.push(t);
			if (outcome === 'corrected') latest = Math.max(latest, t.seconds ?? latest);
		}
	}
	return { samples: kept, rest };
}

/** Samples taken before time zero, such as −5 min: the kinetics begin at zero, so they are asked about. */
function askBeforeZero(ex: Examination, timed: Timed[]): Timed[] {
	const early = timed.filter((t) => t.seconds !== null && t.seconds < 0);
	if (early.length === 0) return timed;
	const cells = [...new Set(early.map((t) => ex.at(t.sample.time.row, t.sample.time.column)))];
	const one = cells.length === 1;
	const taken = ex.ask({
		rule: 'B18',
		level: 'ask',
		cells,
		key: 'before-zero',
		found: `${showTime(ex, early[0])}, before time zero`,
		expected: 'times from zero upward',
		message: `${someOf(cells)} ${one ? 'lies' : 'lie'} before time zero (${showTime(ex, early[0])}). A sample from before the reaction is left out; keep ${one ? 'it' : 'them'} only if the reaction had begun.`,
		options: [
			{ key: 'leave-out', label: `Leave ${one ? 'it' : 'them'} out: taken before the reaction` },
			{ key: 'keep', label: 'Keep: the reaction had begun' }
		]
	});
	if (taken?.key === 'keep') {
		ex.conversions.push(`${someOf(cells, 8)}: kept before time zero${because(taken.reason)}.`);
		return timed;
	}
	if (taken)
		ex.conversions.push(`${someOf(cells, 8)}: left out, taken before time zero${because(taken.reason)}.`);
	return timed.filter((t) => !early.includes(t));
}

/** Times that fall from the first row to the last: one question in place of a Stop each. Null when they do not, or are to be asked row by row. */
function askDescending(ex: Examination, timed: Timed[]): Timed[] | null {
	const seconds = timed.flatMap((t) => (t.seconds === null ? [] : [t.seconds]));
	if (seconds.length !== timed.length || new Set(seconds).size < 3) return null;
	if (!seconds.every((s, i) => i === 0 || s <= seconds[i - 1])) return null;
	const cells = timed.map((t) => ex.at(t.sample.time.row, t.sample.time.column));
	const [first, last] = [showTime(ex, timed[0]), showTime(ex, timed[timed.length - 1])];
	const taken = ex.ask({
		rule: 'B18',
		level: 'ask',
		cells: [cells[0], cells[cells.length - 1]],
		key: 'descending',
		found: `times that fall from ${first} to ${last}`,
		expected: 'times that increase',
		message: `The times run backwards, from ${first} to ${last}. Is the last ${ex.places.line} the first sample?`,
		options: [
			{ key: 'reverse', label: `Yes: read from the last ${ex.places.line}` },
			{ key: 'single', label: 'No: ask about each time' }
		]
	});
	if (taken?.key === 'single') return null;
	if (taken)
		ex.conversions.push(`Times that fall from ${first} to ${last} read from the last ${ex.places.line}.`);
	return [...timed].reverse();
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
	const cell = ex.at(row, column);
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
		message: `${cell} ${shown} comes after ${latestText}.${changeOf(ex, timed, i)} Typing error${guess ? ` (${guess}?)` : ''} or a new run?`,
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
	if (taken?.key === 'enter') return enterTime(ex, t, taken.text(), taken.reason, unit, shown, latestText);
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

/** " Column A changes from R1 to R2 here.": a column that names the runs speaks for a new one. */
function changeOf(ex: Examination, timed: Timed[], i: number): string {
	const row = timed[i].sample.row;
	const before = timed.slice(0, i).map((t) => t.sample.row);
	for (const { column, role } of ex.mapping.columns) {
		if (role !== 'ignore' && role !== 'sample') continue;
		const texts = new Set(before.map((r) => ex.shown(r, column)));
		const [old] = texts;
		const now = ex.shown(row, column);
		if (texts.size === 1 && old && now && now !== old && before.length > 1)
			return ` ${capital(ex.places.series(column))} changes from "${old.slice(0, 40)}" to "${now.slice(0, 40)}" here.`;
	}
	return '';
}

function enterTime(
	ex: Examination,
	t: Timed,
	text: string,
	reason: string | undefined,
	unit: TimeUnit,
	shown: string,
	latestText: string
): 'corrected' | 'open' {
	ex.correctTime(
		t.sample.time.row,
		t.sample.time.column,
		text,
		reason ?? `Typing error: ${shown} comes after ${latestText}.`
	);
	const reading = ex.time(t.sample.time.row, t.sample.time.column);
	const seconds = secondsOf(reading, { unit, stated: true }, 'h:mm');
	if (seconds === null) {
		ex.reopen(`"${text}" is not a time. Write for example 1.5, 1:30 or 90 min.`);
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
