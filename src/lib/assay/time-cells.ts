/** Cells of the time column that hold no time: blank ones below a filled one (B31), marked ones, errors (B25) and texts (B18). */
import type { FindingOption } from '$lib/schemas/sheet';
import type { Taken } from './answers';
import type { Channel } from './channels';
import type { Examination } from './examination';
import { readMark } from './marks';
import type { Sample } from './samples';
import { readTimeText, type TimeReading } from './times';
import { because, capital, ENTER, someOf } from './wording';

const isTime = (r: TimeReading): boolean => r.kind !== 'blank' && r.kind !== 'error' && r.kind !== 'text';
const timeOf = (ex: Examination, s: Sample): TimeReading => ex.time(s.time.row, s.time.column);
const cellOf = (ex: Examination, s: Sample): string => ex.at(s.time.row, s.time.column);

/** The samples that have a time, once what is missing was asked. */
export function settleTimeCells(ex: Examination, samples: Sample[], channels: Channel[]): Sample[] {
	const real = dropEmpty(ex, samples, channels);
	const filled = fillBlanks(ex, askMarkedTimes(ex, real));
	const kept: Sample[] = [];
	const asked = new Map<string, boolean>();
	for (const s of filled) {
		const reading = timeOf(ex, s);
		const cell = cellOf(ex, s);
		if (!isTime(reading) && !asked.has(cell)) asked.set(cell, askTimeCell(ex, s, reading));
		if (isTime(reading) || asked.get(cell)) kept.push(s);
	}
	return kept;
}

/** Rows without a time and without a value are remarks inside the table. */
function dropEmpty(ex: Examination, samples: Sample[], channels: Channel[]): Sample[] {
	if (channels.length === 0 || ex.mapping.layout === 'long') return samples;
	const places = (s: Sample) => [...s.cells.values()];
	const empty = new Set(samples.filter((s) => timeOf(ex, s).kind === 'blank').map((s) => s.row));
	if (empty.size === 0) return samples;
	for (const s of samples)
		if (empty.has(s.row) && places(s).some((p) => ex.value(p.row, p.column).kind !== 'blank'))
			empty.delete(s.row);
	if (empty.size === 0) return samples;
	const rows = [...empty];
	ex.note({
		rule: 'B27',
		cells: rows.map((r) => ex.at(r, ex.mapping.block.firstColumn)),
		key: 'remarks',
		found: `${ex.places.samples(rows)} without a time and a value`,
		expected: 'a time and values in each row of the data',
		message: `${capital(ex.places.samples(rows))} ${rows.length === 1 ? 'holds' : 'hold'} neither a time nor a value; shown and not used.`
	});
	return samples.filter((s) => !empty.has(s.row));
}

/** "~2", "90 min*": asked once, the time without its mark is offered. */
function askMarkedTimes(ex: Examination, samples: Sample[]): Sample[] {
	const marked = new Map<string, { text: string; core: string }>();
	for (const s of samples) {
		const reading = timeOf(ex, s);
		const mark = reading.kind === 'text' ? readMark(reading.text) : null;
		if (mark && reading.kind === 'text' && isTime(readTimeText(mark.core, ex.decimal)))
			marked.set(cellOf(ex, s), { text: reading.text, core: mark.core });
	}
	if (marked.size === 0) return samples;
	const [first] = marked.values();
	const cells = [...marked.keys()];
	const taken = ex.ask({
		rule: 'B18',
		level: 'ask',
		cells,
		key: 'marked',
		found: `"${first.text}"`,
		expected: 'a plain time',
		message: `"${first.text}" in ${someOf(cells)}: a time with a mark. Read ${first.core}?`,
		options: [
			{
				key: 'number',
				label: cells.length === 1 ? `Read ${first.core}` : 'Read the times without their marks'
			},
			{ key: 'leave-out', label: `Leave the ${ex.places.line}${cells.length === 1 ? '' : 's'} out` }
		]
	});
	if (taken?.key !== 'number') {
		if (taken)
			ex.conversions.push(`${someOf(cells, 8)}: left out, times with a mark${because(taken.reason)}.`);
		return samples.filter((s) => !marked.has(cellOf(ex, s)));
	}
	for (const [cell, m] of marked) ex.readTimeAs(cell, m.core);
	ex.conversions.push(
		`${someOf(cells, 8)}: "${first.text}" read as the time ${first.core}; the mark stands on the record${because(taken.reason)}.`
	);
	return samples;
}

/** B31 for cells that are not merged: blank times below a filled one, one question for all of them. */
function fillBlanks(ex: Examination, samples: Sample[]): Sample[] {
	const above = new Map<Sample, Sample>();
	let last: Sample | null = null;
	for (const s of samples) {
		if (timeOf(ex, s).kind !== 'blank') last = s;
		else if (last) above.set(s, last);
	}
	if (above.size === 0) return samples;
	const taken = askBlanks(ex, above);
	if (!taken || taken.key === 'leave-out') return samples.filter((s) => !above.has(s));
	if (taken.key === 'enter') {
		for (const s of above.keys()) enter(ex, s, taken.text(fieldKey(ex, above, s)), taken.reason);
		return samples.filter((s) => !above.has(s) || isTime(timeOf(ex, s)));
	}
	return samples.map((s) => {
		const from = above.get(s);
		return from ? { ...s, time: { ...s.time, row: from.time.row } } : s;
	});
}

/** Rows for which a time each can be typed into the answer. */
const MOST_FIELDS = 12;

const fieldKey = (ex: Examination, above: Map<Sample, Sample>, s: Sample): string =>
	rowsOf(above).length === 1 ? 'value' : cellOf(ex, s);

const rowsOf = (above: Map<Sample, Sample>): number[] => [...new Set([...above.keys()].map((s) => s.row))];

function askBlanks(ex: Examination, above: Map<Sample, Sample>): Taken | null {
	const rows = rowsOf(above);
	const cells = [...new Set([...above.keys()].map((s) => cellOf(ex, s)))];
	const [[, from]] = above;
	const shown = ex.shown(from.time.row, from.time.column);
	const one = rows.length === 1;
	const where = capital(ex.places.samples(rows));
	const options: FindingOption[] = [
		{
			key: 'fill-down',
			label: one ? `It belongs to ${shown}: a replicate` : 'They belong to the time above: replicates'
		}
	];
	if (rows.length <= MOST_FIELDS)
		options.push({
			key: 'enter',
			label: one ? 'Enter the time' : 'Enter each time',
			needsValue: cells.map((cell) => ({
				key: one ? 'value' : cell,
				label: one ? 'Time' : `Time in ${cell}`,
				kind: 'text'
			}))
		});
	options.push({ key: 'leave-out', label: `Leave the ${ex.places.line}${one ? '' : 's'} out` });
	const taken = ex.ask({
		rule: 'B31',
		level: 'ask',
		cells,
		...(one ? {} : { key: 'blank-times' }),
		found: `no time in ${someOf(cells)}`,
		expected: `a time in each ${ex.places.line}`,
		message: one
			? `${where} has values but no time in ${cells[0]}. A replicate at ${shown}, or a time of its own?`
			: `${where} have values but no time (${someOf(cells)}). Replicates at the time before them, or times of their own?`,
		options
	});
	if (taken?.key === 'fill-down')
		ex.conversions.push(`${where}: taken at the time before ${one ? 'it' : 'them'}${because(taken.reason)}.`);
	if (taken?.key === 'leave-out') ex.conversions.push(`${where} left out: no time${because(taken.reason)}.`);
	return taken;
}

function enter(ex: Examination, s: Sample, text: string, reason: string | undefined): boolean {
	ex.correctTime(
		s.time.row,
		s.time.column,
		text,
		reason ?? `Time entered for ${ex.places.samples([s.row])}, which held none.`
	);
	if (isTime(timeOf(ex, s))) return true;
	ex.reopen(`"${text}" is not a time. Write for example 1.5, 1:30 or 90 min.`);
	return false;
}

/** One cell without a time that nothing above it can stand for; true when it has one after the answer. */
function askTimeCell(ex: Examination, s: Sample, reading: TimeReading): boolean {
	const cell = cellOf(ex, s);
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
				? `${capital(ex.places.samples([s.row]))} has values but no time in ${cell}. Enter the time, or leave the ${ex.places.line} out.`
				: `${cell} holds ${found} where a time is expected. Enter the time, or leave the ${ex.places.line} out.`,
		options: [ENTER('Enter the time'), { key: 'leave-out', label: `Leave the ${ex.places.line} out` }]
	});
	if (taken?.key === 'leave-out')
		ex.conversions.push(
			`${capital(ex.places.samples([s.row]))} left out: ${found} in ${cell}${because(taken.reason)}.`
		);
	return taken?.key === 'enter' && enter(ex, s, taken.text(), taken.reason);
}
