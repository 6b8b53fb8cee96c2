/** Attributes of a worksheet part as values: row numbers, columns of addresses, spans, dates in ISO form. */
import { calendarToSerial } from '$lib/assay/number-format';
import { damaged } from './refusal';

export const isOn = (value: string | undefined) => value === '1' || value === 'true';

export function whole(text: string | undefined, most: number): number {
	const n = Number(text);
	if (!Number.isInteger(n) || n < 1 || n > most) throw damaged('a row or column lies outside the sheet');
	return n;
}

export function columnOf(ref: string): number {
	let n = 0;
	let i = 0;
	for (; i < ref.length; i++) {
		const code = ref.charCodeAt(i) & 0xdf;
		if (code < 65 || code > 90) break;
		n = n * 26 + code - 64;
	}
	return i > 3 ? 0 : n;
}

/** Spans grow when neighbours follow each other, so that a million hidden rows are one span. */
export function addSpan(spans: [number, number][], first: number, last: number): void {
	const before = spans.at(-1);
	if (before && first <= before[1] + 1 && first >= before[0]) before[1] = Math.max(before[1], last);
	else spans.push([first, last]);
}

export function isoSerial(text: string, date1904: boolean): number | null {
	const m = /^(\d{4})-(\d\d)-(\d\d)(?:T(\d\d):(\d\d)(?::(\d\d(?:\.\d+)?))?)?Z?$/.exec(text.trim());
	if (!m) return null;
	const [year, month, day, hour, minute] = [m[1], m[2], m[3], m[4] ?? 0, m[5] ?? 0].map(Number);
	return calendarToSerial(
		{ year, month, day, hour, minute, second: Number(m[6] ?? 0) },
		date1904 ? 1904 : 1900
	);
}
