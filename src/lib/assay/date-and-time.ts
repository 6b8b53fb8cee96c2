/** B16 for two columns: a date beside a time of day, brought together where the dates differ, so that the next morning is not the same hour. */
import type { Examination } from './examination';
import { capital, plural } from './wording';
import type { Sample } from './samples';
import type { TimeReading } from './times';

type Stamp = TimeReading & { kind: 'stamp' };

/** The readings with their dates where the person says so, else as they are; null while that is asked. */
export function withDates(ex: Examination, samples: Sample[], readings: TimeReading[]): TimeReading[] | null {
	if (readings.length < 2 || !readings.every((r) => dayPart(r) !== null)) return readings;
	const column = ex.mapping.columns.find((c) => c.role === 'ignore' && datesOf(ex, samples, c.column));
	const dates = column && datesOf(ex, samples, column.column);
	if (!column || !dates || new Set(dates.map((d) => d.days)).size < 2) return readings;
	const time = samples[0].time.column;
	const taken = ex.ask({
		rule: 'B16',
		level: 'ask',
		cells: [ex.at(samples[0].row, column.column), ex.at(samples[0].row, time)],
		key: 'date-column',
		found: `dates in ${ex.places.series(column.column)} beside times in ${ex.places.series(time)}`,
		expected: 'one moment for each sample',
		message: `${capital(ex.places.series(column.column))} holds dates (${dates[0].text} to ${dates[dates.length - 1].text}) beside the times in ${ex.places.series(time)}. Times of day on these dates?`,
		options: [
			{ key: 'together', label: 'Yes: date and time of day together' },
			{ key: 'apart', label: 'No: the times stand by themselves' }
		]
	});
	if (!taken) return null;
	if (taken.key === 'apart') return readings;
	ex.conversions.push(
		`Dates of ${ex.places.series(column.column)} and times of day of ${ex.places.series(time)} read together (${plural(readings.length, ex.places.line)}).`
	);
	return readings.map((r, i) => joined(dates[i], r));
}

function joined(date: Stamp, r: TimeReading): Stamp {
	const part = dayPart(r) ?? 0;
	return {
		...date,
		days: date.days + part,
		...(date.otherDays === undefined ? {} : { otherDays: date.otherDays + part }),
		text: `${date.text} ${'text' in r ? r.text : ''}`.trim()
	};
}

/** Part of a day that a time of day stands for; null for what is none. */
function dayPart(r: TimeReading): number | null {
	if (r.kind === 'serial') return r.wraps && r.days >= 0 && r.days < 1 ? r.days : null;
	if (r.kind !== 'colon' || r.parts[0] > 23) return null;
	return (r.parts[0] * 3600 + r.parts[1] * 60 + (r.parts[2] ?? 0)) / 86_400;
}

/** "Day": 1, 2, 3 beside the times of day. */
function isDayColumn(ex: Examination, column: number): boolean {
	const header = ex.mapping.headerRows
		.map((r) => ex.shown(r, column))
		.join(' ')
		.trim();
	return /^(day|tag|jour|d[ií]a|giorno|dag)s?$/i.test(header);
}

/** A day by its number, on a calendar without clock changes of its own: 2 January 1900 and on. */
const dayNumber = (n: number): Stamp => ({
	kind: 'stamp',
	days: 2 + n,
	utcOffsetMin: 0,
	orders: 'sure',
	text: `day ${n}`
});

/** Whole dates of each sample's row; a date written once holds for the rows below it. Null when the column holds anything else. */
function datesOf(ex: Examination, samples: Sample[], column: number): Stamp[] | null {
	const dates: Stamp[] = [];
	const counted = isDayColumn(ex, column);
	for (const s of samples) {
		const reading = ex.time(s.time.row, column);
		const before = dates.at(-1);
		if (reading.kind === 'stamp' && Number.isInteger(reading.days)) dates.push(reading);
		else if (reading.kind === 'number' && counted && Number.isInteger(reading.value))
			dates.push(dayNumber(reading.value));
		else if (reading.kind === 'blank' && before) dates.push(before);
		else return null;
	}
	return dates;
}
