/**
 * Number formats of spreadsheet cells: what a format code makes of a stored number, and the text that a person saw.
 * The stored number is what counts (a duration of 25 h shown as 01:00 is 25 h); the text is for showing and for messages.
 * Format codes: ECMA-376-1 (5th ed., 2016), section 18.8.31 and the built-in codes of section 18.8.30.
 */
import type { FormatKind } from '$lib/schemas/sheet';

/** Built-in codes by id; ids that follow the reader's locale get an unambiguous form (ISO date). */
const BUILT_IN: Record<number, string> = {
	0: 'General',
	1: '0',
	2: '0.00',
	3: '#,##0',
	4: '#,##0.00',
	9: '0%',
	10: '0.00%',
	11: '0.00E+00',
	12: '# ?/?',
	13: '# ??/??',
	14: 'yyyy-mm-dd',
	15: 'd-mmm-yy',
	16: 'd-mmm',
	17: 'mmm-yy',
	18: 'h:mm AM/PM',
	19: 'h:mm:ss AM/PM',
	20: 'h:mm',
	21: 'h:mm:ss',
	22: 'yyyy-mm-dd h:mm',
	37: '#,##0',
	38: '#,##0',
	39: '#,##0.00',
	40: '#,##0.00',
	45: 'mm:ss',
	46: '[h]:mm:ss',
	47: 'mm:ss.0',
	48: '##0.0E+0',
	49: '@'
};

/** Format code of a built-in id; 'General' for those not listed. Ids 27–36 and 50–58 are East Asian dates. */
export function builtInFormat(id: number): string {
	if ((id >= 27 && id <= 36) || (id >= 50 && id <= 58)) return 'yyyy-mm-dd';
	return BUILT_IN[id] ?? 'General';
}

/** First section of a code without quoted text, escapes, colours, conditions and locale marks; elapsed brackets stay. */
function skeleton(code: string): string {
	return firstSection(code)
		.replace(/"[^"]*"/g, '')
		.replace(/\\./g, '')
		.replace(/[_*]./g, '')
		.replace(/\[(?!(?:h+|m+|s+)\])[^\]]*\]/gi, '');
}

function firstSection(code: string): string {
	let quoted = false;
	for (let i = 0; i < code.length; i++) {
		if (code[i] === '\\') i++;
		else if (code[i] === '"') quoted = !quoted;
		else if (code[i] === ';' && !quoted) return code.slice(0, i);
	}
	return code;
}

/** What the code makes of a number. */
export function formatKind(code: string): FormatKind {
	const text = skeleton(code.slice(0, 300));
	if (/^general$/i.test(text.trim()) || text.trim() === '') return 'general';
	if (text.includes('@')) return 'text';
	if (/\[(h+|m+|s+)\]/i.test(text)) return 'duration';
	if (/%/.test(text)) return 'percent';
	const clock = /[hs]/i.test(text.replace(/general/gi, ''));
	const calendar = /[yd]/i.test(text) || (/m/i.test(text) && !clock);
	if (calendar && clock) return 'datetime';
	if (calendar) return 'date';
	if (clock) return 'time';
	if (/E[+-]/i.test(text)) return 'scientific';
	if (/[#0?]\/[#0?\d]/.test(text)) return 'fraction';
	return 'number';
}

const pad = (n: number, width = 2) => String(n).padStart(width, '0');
const MONTHS = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec'];

export interface CalendarTime {
	year: number;
	month: number;
	day: number;
	hour: number;
	minute: number;
	second: number;
}

const DAY_MS = 86_400_000;
/** Day 0 of each date system as a UTC instant. 1900: serial 60 is the day 29 Feb 1900 that never was. */
const EPOCH_1900 = Date.UTC(1899, 11, 30);
const EPOCH_1904 = Date.UTC(1904, 0, 1);

/** Calendar reading of a serial day number, rounded to the millisecond. Serials 0 to 60 of the 1900 system are one day off, as the format has it. */
export function serialToCalendar(serial: number, dateSystem: 1900 | 1904): CalendarTime {
	const shift = dateSystem === 1900 && serial < 60 ? 1 : 0;
	const epoch = dateSystem === 1904 ? EPOCH_1904 : EPOCH_1900;
	const at = new Date(epoch + Math.round((serial + shift) * DAY_MS));
	return {
		year: at.getUTCFullYear(),
		month: at.getUTCMonth() + 1,
		day: at.getUTCDate(),
		hour: at.getUTCHours(),
		minute: at.getUTCMinutes(),
		second: at.getUTCSeconds() + at.getUTCMilliseconds() / 1000
	};
}

/** Serial day number of a calendar time. */
export function calendarToSerial(c: CalendarTime, dateSystem: 1900 | 1904): number {
	const ms = Date.UTC(c.year, c.month - 1, c.day, c.hour, c.minute) + c.second * 1000;
	return (ms - (dateSystem === 1904 ? EPOCH_1904 : EPOCH_1900)) / DAY_MS;
}

/** The text that a person saw, nearly: decimal point always ".", dates by the code's own order. */
export function formatNumber(value: number, code: string, kind: FormatKind, dateSystem: 1900 | 1904): string {
	switch (kind) {
		case 'general':
		case 'text':
			return general(value);
		case 'percent':
			return fixed(value * 100, skeleton(code)) + '%';
		case 'number':
			return fixed(value, skeleton(code));
		case 'scientific':
			return value.toExponential(decimalsOf(skeleton(code).replace(/E.*/i, ''))).replace('e', 'E');
		case 'fraction':
			return general(value);
		case 'duration':
			return duration(value, skeleton(code));
		case 'date':
		case 'time':
		case 'datetime':
			return calendar(value, code, dateSystem);
	}
}

function general(value: number): string {
	const size = Math.abs(value);
	if (size !== 0 && (size >= 1e11 || size < 1e-9)) return value.toExponential().replace('e', 'E');
	return String(Number(value.toPrecision(11)));
}

function decimalsOf(code: string): number {
	return Math.min(20, /\.([0#?]*)/.exec(code)?.[1].length ?? 0);
}

function fixed(value: number, code: string): string {
	const forced = Math.min(20, /\.(0*)/.exec(code)?.[1].length ?? 0);
	let text = Math.abs(value) < 1e21 ? value.toFixed(decimalsOf(code)) : String(value);
	const [whole, part = ''] = text.split('.');
	const kept = part.slice(0, forced) + part.slice(forced).replace(/0+$/, '');
	const grouped = /[#0],[#0]/.test(code) ? whole.replace(/\B(?=(\d{3})+(?!\d))/g, ',') : whole;
	text = kept ? `${grouped}.${kept}` : grouped;
	return text;
}

function duration(value: number, code: string): string {
	const sign = value < 0 ? '-' : '';
	const tenths = /s+\.0/i.test(code);
	const total = Math.round(Math.abs(value) * 86_400 * (tenths ? 10 : 1)) / (tenths ? 10 : 1);
	const seconds = /s/i.test(code)
		? ':' + pad(Math.floor(total % 60)) + (tenths ? (total % 1).toFixed(1).slice(1) : '')
		: '';
	if (/\[s+\]/i.test(code)) return sign + String(total);
	if (/\[m+\]/i.test(code)) return sign + String(Math.floor(total / 60)) + seconds;
	const minutes = Math.floor((total % 3600) / 60);
	return `${sign}${Math.floor(total / 3600)}:${pad(minutes)}${seconds}`;
}

function calendar(value: number, code: string, dateSystem: 1900 | 1904): string {
	if (value < 0 || value > 2_958_466) return general(value);
	// Shown to the second at most: what lies below is rounded so that 0.999… does not show as the minute before.
	const c = serialToCalendar(Math.round(value * 86_400) / 86_400, dateSystem);
	const text = firstSection(code)
		.replace(/\[[^\]]*\]/g, '')
		.replace(/[_*]./g, '');
	const noon = /AM\/PM|A\/P/i.test(text);
	let out = '';
	let afterHour = false;
	for (const token of text.match(/"[^"]*"|\\.|AM\/PM|A\/P|y+|m+|d+|h+|s+(?:\.0+)?|./gi) ?? []) {
		const head = token[0].toLowerCase();
		if (token[0] === '"') out += token.slice(1, -1);
		else if (token[0] === '\\') out += token[1];
		else if (/^A/i.test(token)) out += c.hour < 12 ? 'AM' : 'PM';
		else if (head === 'y') out += token.length > 2 ? pad(c.year, 4) : pad(c.year % 100);
		else if (head === 'd') out += token.length > 1 ? pad(c.day) : c.day;
		else if (head === 'h') out += padIf(noon ? c.hour % 12 || 12 : c.hour, token.length > 1);
		else if (head === 's') out += padIf(Math.floor(c.second), token.length > 1);
		else if (head === 'm') out += minuteOrMonth(token, c, afterHour || followedBySeconds(text, out));
		else out += token;
		if (head === 'h') afterHour = true;
		else if (/[ymds]/.test(head)) afterHour = false;
	}
	return out;
}

const padIf = (n: number, wide: boolean) => (wide ? pad(n) : String(n));

/** "mm:ss" counts minutes: no hour before it, seconds behind it. */
function followedBySeconds(code: string, before: string): boolean {
	return before === '' && /^m+:s/i.test(code);
}

function minuteOrMonth(token: string, c: CalendarTime, minute: boolean): string {
	if (minute && token.length <= 2) return padIf(c.minute, token.length > 1);
	if (token.length >= 3) return MONTHS[c.month - 1];
	return padIf(c.month, token.length > 1);
}
