/**
 * Times as sheets hold them. A duration is the stored number of days × 24 h, whatever the display shows: 25 h formatted h:mm
 * looks like 01:00. Serial days are brought to whole milliseconds (a spreadsheet keeps 15 digits, so 0:15 is stored as
 * 0.0104166666666667 d = 900.000000000003 s).
 */
import { CELL, type GridCell, type GridWorkbook, type TimeUnit } from '$lib/schemas/sheet';
import { textAround } from './format-literals';
import { cellStyle, displayText, hasFlag } from './grid';
import { type CalendarTime, calendarToSerial } from './number-format';
import { type Decimal, parseNumber } from './numbers';
import { readUnit, SECONDS } from './units';

export type TimeReading =
	| { kind: 'blank' }
	| { kind: 'number'; value: number }
	/** Serial days in a time or duration format: elapsed or time of day, the column decides. */
	| { kind: 'serial'; days: number; wraps: boolean; text: string }
	/** "1:30" or "1:30:00" as text. */
	| { kind: 'colon'; parts: number[]; text: string }
	/** "90 min", "1 h 30 min": carries its unit. */
	| { kind: 'worded'; seconds: number; units: TimeUnit[]; text: string }
	/** A point in time: days since 30 Dec 1899 as the clock on the wall showed it; `utcOffsetMin` when the text states it. */
	| {
			kind: 'stamp';
			days: number;
			utcOffsetMin: number | null;
			orders: 'sure' | 'either';
			otherDays?: number;
			text: string;
	  }
	| { kind: 'error'; text: string }
	| { kind: 'text'; text: string };

const WORDED = /(\d+(?:[.,]\d+)?)\s*([a-zé]+\.?)/giu;

export function readTime(
	workbook: GridWorkbook,
	cell: GridCell | undefined,
	decimal: Decimal | null,
	overlay?: string
): TimeReading {
	if (overlay !== undefined) return readTimeText(overlay, decimal);
	if (!cell || (cell[1] === null && !hasFlag(cell, CELL.uncomputed))) return { kind: 'blank' };
	if (hasFlag(cell, CELL.error)) return { kind: 'error', text: String(cell[1]) };
	if (hasFlag(cell, CELL.uncomputed)) return { kind: 'error', text: 'a formula without a stored result' };
	const value = cell[1];
	if (typeof value === 'string') return readTimeText(value, decimal);
	if (typeof value !== 'number') return { kind: 'text', text: displayText(workbook, cell) };
	const { kind, format } = cellStyle(workbook, cell);
	const text = displayText(workbook, cell);
	if (kind === 'duration') return { kind: 'serial', days: value, wraps: false, text };
	if (kind === 'time') return { kind: 'serial', days: value, wraps: true, text };
	if (kind === 'date' || kind === 'datetime') {
		// Below two days a "date" is a duration in disguise only to those who say so; the column decides.
		const days = workbook.dateSystem === 1904 ? value + 1462 : value;
		return { kind: 'stamp', days, utcOffsetMin: null, orders: 'sure', text };
	}
	// `0 "min"` shows 60 as "60 min": the format writes the unit.
	const shown = textAround(format, value);
	const worded = shown === null ? null : readTimeText(shown, '.');
	return worded?.kind === 'worded' ? worded : { kind: 'number', value };
}

export function readTimeText(raw: string, decimal: Decimal | null): TimeReading {
	const text = raw.replace(/[\s\u00a0]+/g, ' ').trim();
	if (text === '' || /^[-–—/]$/.test(text)) return { kind: 'blank' };
	const plain = text.replace(/^t\s*[=:_]?\s*(?=\d)/i, '').replace(/^\+\s*(?=\d)/, '');
	const number = parseNumber(plain, decimal);
	if (number !== null) return { kind: 'number', value: number };
	const colon = /^(\d{1,4}):(\d{2})(?::(\d{2}(?:[.,]\d+)?))?$/.exec(plain);
	if (colon) {
		const parts = [colon[1], colon[2], colon[3]]
			.filter((p) => p !== undefined)
			.map((p) => Number(p.replace(',', '.')));
		return parts.slice(1).every((p) => p < 60) ? { kind: 'colon', parts, text } : { kind: 'text', text };
	}
	const noon = /^(\d{1,2}):(\d{2})(?::(\d{2}))?\s*([ap])\.?m\.?$/i.exec(plain);
	if (noon) return noonTime(noon, text);
	return stampText(plain, text) ?? wordedText(plain, text, decimal) ?? { kind: 'text', text };
}

function noonTime(m: RegExpExecArray, text: string): TimeReading {
	const hour = (Number(m[1]) % 12) + (m[4].toLowerCase() === 'p' ? 12 : 0);
	const seconds = hour * 3600 + Number(m[2]) * 60 + Number(m[3] ?? 0);
	return { kind: 'serial', days: seconds / 86_400, wraps: true, text };
}

function wordedText(plain: string, text: string, decimal: Decimal | null): TimeReading | null {
	const rest = plain.replace(WORDED, '').replace(/[\s,+]|und|and/g, '');
	if (rest !== '') {
		// "1h30": the last number counts the next smaller unit.
		const short = /^(\d+)\s*(d|h)\s*(\d{1,2})$/i.exec(plain);
		if (!short) return null;
		const small: TimeUnit = short[2].toLowerCase() === 'd' ? 'h' : 'min';
		const large: TimeUnit = short[2].toLowerCase() === 'd' ? 'd' : 'h';
		return {
			kind: 'worded',
			seconds: Number(short[1]) * SECONDS[large] + Number(short[3]) * SECONDS[small],
			units: [large],
			text
		};
	}
	let seconds = 0;
	const units: TimeUnit[] = [];
	for (const [, amount, word] of plain.matchAll(WORDED)) {
		const unit = readUnit(word);
		const value = parseNumber(amount, decimal) ?? parseNumber(amount, null);
		if (unit?.of !== 'time' || value === null) return null;
		seconds += value * SECONDS[unit.unit];
		units.push(unit.unit);
	}
	return units.length > 0 ? { kind: 'worded', seconds, units, text } : null;
}

const MONTHS: Record<string, number> = {
	jan: 1,
	ene: 1,
	feb: 2,
	fév: 2,
	fev: 2,
	mar: 3,
	mär: 3,
	apr: 4,
	avr: 4,
	abr: 4,
	may: 5,
	mai: 5,
	jun: 6,
	jul: 7,
	aug: 8,
	aoû: 8,
	aou: 8,
	ago: 8,
	sep: 9,
	oct: 10,
	okt: 10,
	nov: 11,
	dec: 12,
	dez: 12,
	déc: 12,
	dic: 12
};

const CLOCK_PART =
	'(?:[ T,]+(\\d{1,2}):(\\d{2})(?::(\\d{2}(?:\\.\\d+)?))?\\s*([ap]m)?\\s*(Z|[+-]\\d{2}:?\\d{2})?)?';

const ISO = new RegExp(`^(\\d{4})-(\\d{1,2})-(\\d{1,2})${CLOCK_PART}$`, 'i');

const NUMERIC = new RegExp(`^(\\d{1,2})([./-])(\\d{1,2})\\2(\\d{4}|\\d{2})${CLOCK_PART}$`, 'i');

const NAMED = new RegExp(
	`^(\\d{1,2})[-. ]{1,2}([\\p{L}]{3,9})\\.?[-. ]{1,2}(\\d{4}|\\d{2})${CLOCK_PART}$`,
	'iu'
);

function stampText(plain: string, text: string): TimeReading | null {
	let m = ISO.exec(plain);
	if (m) return stamp(Number(m[1]), Number(m[2]), Number(m[3]), m.slice(4), text, false);
	m = NAMED.exec(plain);
	if (m) {
		const month = MONTHS[m[2].slice(0, 3).toLowerCase()];
		return month ? stamp(fullYear(m[3]), month, Number(m[1]), m.slice(4), text, false) : null;
	}
	m = NUMERIC.exec(plain);
	if (!m) return null;
	const [first, second] = [Number(m[1]), Number(m[3])];
	// Dots mean day first; with strokes both orders are in use.
	if (m[2] === '.' || first > 12) return stamp(fullYear(m[4]), second, first, m.slice(5), text, false);
	if (second > 12) return stamp(fullYear(m[4]), first, second, m.slice(5), text, false);
	return stamp(fullYear(m[4]), second, first, m.slice(5), text, first !== second);
}

const fullYear = (text: string) => (text.length === 2 ? 2000 + Number(text) : Number(text));

function stamp(
	year: number,
	month: number,
	day: number,
	clock: (string | undefined)[],
	text: string,
	either: boolean
): TimeReading | null {
	if (month < 1 || month > 12 || day < 1 || day > 31) return null;
	let hour = Number(clock[0] ?? 0);
	if (clock[3]) hour = (hour % 12) + (clock[3].toLowerCase() === 'pm' ? 12 : 0);
	const time: CalendarTime = {
		year,
		month,
		day,
		hour,
		minute: Number(clock[1] ?? 0),
		second: Number(clock[2] ?? 0)
	};
	const days = calendarToSerial(time, 1900);
	const otherDays = either ? calendarToSerial({ ...time, month: day, day: month }, 1900) : undefined;
	return {
		kind: 'stamp',
		days,
		utcOffsetMin: offsetOf(clock[4]),
		orders: either ? 'either' : 'sure',
		otherDays,
		text
	};
}

function offsetOf(text: string | undefined): number | null {
	if (!text) return null;
	if (/^z$/i.test(text)) return 0;
	const m = /^([+-])(\d{2}):?(\d{2})$/.exec(text);
	return m ? (m[1] === '-' ? -1 : 1) * (Number(m[2]) * 60 + Number(m[3])) : null;
}

/** Seconds of a number of days, to the millisecond. */
export const daysToSeconds = (days: number): number => Math.round(days * 86_400_000) / 1000;

/** Seconds as "1:30" or "1:30:05". */
export function clockText(seconds: number): string {
	const sign = seconds < 0 ? '-' : '';
	const total = Math.round(Math.abs(seconds));
	const rest = total % 60;
	const text = `${Math.floor(total / 3600)}:${String(Math.floor((total % 3600) / 60)).padStart(2, '0')}`;
	return sign + text + (rest ? ':' + String(rest).padStart(2, '0') : '');
}

/** Seconds in a unit, without the dust of binary division (900 s / 3600 is exactly 0.25 anyway; 100 s / 60 is rounded to 15 digits). */
export const secondsIn = (seconds: number, unit: TimeUnit): number =>
	Number((seconds / SECONDS[unit]).toPrecision(15));
