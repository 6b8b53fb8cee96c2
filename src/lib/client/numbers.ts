/** How numbers are read and shown. Full precision stays in the value; these are for the eye. */

const DECIMAL = /^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i;

/** Reads what a person typed into a number field; says what is wrong instead of guessing. */
export function readNumber(text: string): { value: number | null; problem: string | null } {
	const t = text
		.trim()
		.replace(/\u2212/g, '-')
		.replace(/\s*[×x]\s*10\^?/i, 'e');
	if (t === '') return { value: null, problem: null };
	if (t.includes(','))
		return { value: null, problem: 'Write the decimal sign as a point, without thousands separators.' };
	if (!DECIMAL.test(t)) return { value: null, problem: `“${text.trim()}” is not a number.` };
	const value = Number(t);
	if (!Number.isFinite(value)) return { value: null, problem: 'This number is too large to hold.' };
	return { value, problem: null };
}

const MINUS = '\u2212';
const SUPERSCRIPT = '⁰¹²³⁴⁵⁶⁷⁸⁹';
const superscript = (n: number): string =>
	(n < 0 ? '⁻' : '') + [...String(Math.abs(n))].map((d) => SUPERSCRIPT[Number(d)]).join('');

/** Plain decimals for ordinary sizes, ×10ⁿ beyond; a true minus sign. `decimals` counts places after the sign. */
function show(value: number, decimals: number): string {
	const fixed = value.toFixed(Math.min(100, Math.max(0, decimals)));
	return (Number(fixed) === 0 ? fixed.replace('-', '') : fixed).replace('-', MINUS);
}

const exponentOf = (value: number): number => (value === 0 ? 0 : Number(value.toExponential().split('e')[1]));

function scientific(value: number, mantissaDecimals: number): string {
	const [mantissa, exponent] = value.toExponential(Math.min(100, Math.max(0, mantissaDecimals))).split('e');
	return `${mantissa.replace('-', MINUS)}×10${superscript(Number(exponent))}`;
}

const useScientific = (value: number): boolean =>
	value !== 0 && (Math.abs(value) < 1e-4 || Math.abs(value) >= 1e6);

/** `digits` significant digits; trailing zeros are kept, they are part of the statement. */
export function significant(value: number, digits = 3): string {
	if (!Number.isFinite(value)) return Number.isNaN(value) ? 'not known' : value > 0 ? '∞' : `${MINUS}∞`;
	if (value === 0) return '0';
	if (useScientific(value)) return scientific(value, digits - 1);
	const rounded = Number(value.toPrecision(digits));
	return show(rounded, digits - 1 - exponentOf(rounded));
}

/** Places after the decimal sign that put the last digit at the second significant digit of `se`. */
export function decimalsFor(se: number): number {
	return 1 - exponentOf(Number(se.toPrecision(2)));
}

/** The value cut at the second significant digit of its standard error; without one, `digits` significant digits. */
export function roundToError(value: number, se?: number | null, digits = 3): string {
	if (!Number.isFinite(value)) return significant(value);
	if (se === undefined || se === null || !Number.isFinite(se) || se <= 0) return significant(value, digits);
	const decimals = decimalsFor(se);
	const size = Math.max(Math.abs(value), se);
	if (useScientific(size)) return scientific(value, Math.max(0, decimals + exponentOf(value)));
	if (decimals >= 0) return show(value, decimals);
	const step = 10 ** -decimals;
	return show(Math.round(value / step) * step, 0);
}

/** Seconds in the unit a person would say them in: 52 min, 1.77 h, 3.1 d. */
export function duration(seconds: number, digits = 3): string {
	if (!Number.isFinite(seconds)) return 'without end';
	const size = Math.abs(seconds);
	if (size === 0) return '0 s';
	if (size < 0.001) return `${significant(seconds, digits)} s`;
	if (size < 1) return `${significant(seconds * 1e3, digits)} ms`;
	if (size < 100) return `${significant(seconds, size < 10 ? digits : 2)} s`;
	if (size < 5940) return `${significant(seconds / 60, size < 600 ? digits : 2)} min`;
	if (size < 48 * 3600) return `${significant(seconds / 3600, digits)} h`;
	if (size < 365.25 * 86400) return `${significant(seconds / 86400, digits)} d`;
	return `${significant(seconds / (365.25 * 86400), digits)} years`;
}

/** A unit as shown: the code `degC` reads °C. */
export const unitText = (unit: string): string => (unit === 'degC' ? '°C' : unit);

/** 01 Dec 2026 14:02 in the site's time zone. */
export function dateTime(value: Date | string | number, timeZone = 'UTC'): string {
	return `${dateOnly(value, timeZone)} ${timeOnly(value, timeZone)}`;
}
export function dateOnly(value: Date | string | number, timeZone = 'UTC'): string {
	const part = (options: Intl.DateTimeFormatOptions) =>
		new Intl.DateTimeFormat('en-GB', { timeZone, ...options }).format(new Date(value));
	return `${part({ day: '2-digit' })} ${part({ month: 'short' }).slice(0, 3)} ${part({ year: 'numeric' })}`;
}
export function timeOnly(value: Date | string | number, timeZone = 'UTC'): string {
	return new Intl.DateTimeFormat('en-GB', { timeZone, hour: '2-digit', minute: '2-digit' }).format(
		new Date(value)
	);
}

/** A number that a person entered, or an axis mark: as short as it is, without the noise of binary fractions. */
export function plain(value: number, digits = 6): string {
	return String(Number(value.toPrecision(digits))).replace('-', MINUS);
}
