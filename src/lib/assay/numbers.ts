/**
 * Numbers written as text, under either decimal convention. The convention is decided once for the whole file from all its
 * cells; a cell that reads as two different numbers ("1,234") never decides by itself.
 */
export type Decimal = '.' | ',';

const SPACES = /[\s\u00a0\u2000-\u200b\u202f\u205f\u3000\ufeff]/g;
const MINUS = /[\u2212\u2012\u2013\u2014\ufe63\uff0d]/g;

/** True when the text holds signs that are not plain ASCII digits and signs: no-break spaces, Unicode minus, full-width digits. */
export const hasOddSigns = (text: string): boolean => /[^\x20-\x7e]/.test(text);

/** Unicode minus, spaces within, apostrophes as thousands, full-width digits: one plain spelling. */
export function plainNumberText(text: string): string {
	return text
		.replace(MINUS, '-')
		.replace(/[\uff10-\uff19]/g, (d) => String.fromCharCode(d.charCodeAt(0) - 0xfee0))
		.replace(/(\d)['’](?=\d{3}(?:\D|$))/g, '$1')
		.replace(SPACES, '');
}

/** Number part of a text: sign, digits, separators, exponent. */
const NUMBER = /^[+-]?(?:\d[\d.,]*|[.,]\d+)(?:[eE][+-]?\d{1,3})?$/;

/** Spaces stand only where thousands are parted: "1 234" is one number, "12 5" is not. */
const SPACED = /^[+-]?\d{1,3}(?:[\s\u00a0\u2000-\u200a\u202f]\d{3})+(?:[.,]\d+)?$/;

export interface NumberText {
	/** What the text means when "." or "," is the decimal sign; null when it means nothing then. */
	point: number | null;
	comma: number | null;
}

/** Both readings of a text; null when it is not a number under either. */
export function numberText(text: string): NumberText | null {
	const simple = simpleNumber(text);
	if (simple) return simple;
	if (!/[\d\uff10-\uff19]/.test(text) || text.length > 80) return null;
	const trimmed = exponentText(text).replace(MINUS, '-').trim();
	const inner = trimmed.replace(/^([+-])[\s\u00a0]+/, '$1');
	if (/\d[\s\u00a0\u2000-\u200a\u202f]+[\d]/.test(inner) && !SPACED.test(inner)) return null;
	const plain = plainNumberText(inner);
	if (!NUMBER.test(plain)) return null;
	const point = readAs(plain, '.');
	const comma = readAs(plain, ',');
	return point === null && comma === null ? null : { point, comma };
}

const RAISED = '⁰¹²³⁴⁵⁶⁷⁸⁹';
const POWER =
	/(\d)\s*[×x*·]\s*10\s*(?:\^\s*\(?([+\-\u2212]?\d{1,2})\)?|([⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]{1,2})|([-\u2212]\d{1,2}))$/i;

/** "1.2 × 10⁻⁴" and "1.2 x 10^-4" as "1.2e-4". */
function exponentText(text: string): string {
	return text.trim().replace(POWER, (_, digit: string, caret?: string, raised?: string, signed?: string) => {
		const plain = raised
			?.replace(/[⁰¹²³⁴-⁹]/g, (d) => String(RAISED.indexOf(d)))
			.replace(/[⁺⁻]/, (s) => (s === '⁻' ? '-' : ''));
		return `${digit}e${(caret ?? plain ?? signed ?? '').replace(MINUS, '-')}`;
	});
}

/** The common case without regular expressions: digits with at most one separator that cannot part thousands. */
function simpleNumber(text: string): NumberText | null {
	let separator = -1;
	const start = text.charCodeAt(0) === 45 ? 1 : 0;
	for (let i = start; i < text.length; i++) {
		const code = text.charCodeAt(i);
		if (code >= 48 && code <= 57) continue;
		if ((code !== 46 && code !== 44) || separator >= 0 || i === start || i === text.length - 1) return null;
		separator = i;
	}
	if (text.length === start || text.length > 20) return null;
	if (separator < 0) return { point: Number(text), comma: Number(text) };
	// Three digits behind one to three others: may be thousands.
	if (text.length - separator === 4 && separator - start <= 3 && text.charCodeAt(start) !== 48) return null;
	if (text.charCodeAt(separator) === 46) return { point: Number(text), comma: null };
	return { point: null, comma: Number(text.slice(0, separator) + '.' + text.slice(separator + 1)) };
}

function readAs(text: string, decimal: Decimal): number | null {
	const thousands = decimal === '.' ? ',' : '.';
	const [mantissa, exponent = ''] = text.split(/e/i);
	const parts = mantissa.split(decimal);
	if (parts.length > 2 || (parts[1] ?? '').includes(thousands)) return null;
	if (parts[0].includes(thousands)) {
		if (!new RegExp(`^[+-]?\\d{1,3}(?:\\${thousands}\\d{3})+$`).test(parts[0])) return null;
		// "0,123" has no thousands: nobody writes a leading group of zero.
		if (/^[+-]?0/.test(parts[0])) return null;
	}
	const whole = parts[0].split(thousands).join('');
	const value = Number(
		`${whole || '0'}${parts.length === 2 ? '.' + (parts[1] || '0') : ''}${exponent ? 'e' + exponent : ''}`
	);
	return Number.isFinite(value) ? (/^-/.test(whole) && value > 0 ? -value : value) : null;
}

/** The number under one convention. */
export function parseNumber(text: string, decimal: Decimal | null): number | null {
	const readings = numberText(text);
	if (!readings) return null;
	if (decimal === '.') return readings.point;
	if (decimal === ',') return readings.comma;
	if (readings.point !== null && readings.comma !== null)
		return readings.point === readings.comma ? readings.point : null;
	return readings.point ?? readings.comma;
}

export interface DecimalVotes {
	/** Examples, at most a few, of cells that can only be read one way, and of those that read both ways. */
	point: string[];
	comma: string[];
	ambiguous: { where: string; text: string; point: number; comma: number }[];
	counts: { point: number; comma: number; ambiguous: number };
}

export const noVotes = (): DecimalVotes => ({
	point: [],
	comma: [],
	ambiguous: [],
	counts: { point: 0, comma: 0, ambiguous: 0 }
});

const EXAMPLES = 20;

/** Counts what one text says about the convention of its file. */
export function vote(votes: DecimalVotes, text: string, where: string): void {
	if (!/[.,]/.test(text)) return;
	const readings = numberText(text);
	if (!readings) return;
	const { point, comma } = readings;
	if (point !== null && comma !== null) {
		if (point === comma) return;
		votes.counts.ambiguous++;
		if (votes.ambiguous.length < EXAMPLES) votes.ambiguous.push({ where, text, point, comma });
	} else if (point !== null) {
		votes.counts.point++;
		if (votes.point.length < EXAMPLES) votes.point.push(where);
	} else {
		votes.counts.comma++;
		if (votes.comma.length < EXAMPLES) votes.comma.push(where);
	}
}

/** The convention of the file, or why it cannot be told. */
export function decide(votes: DecimalVotes): {
	decimal: Decimal | null;
	trouble: 'mixed' | 'ambiguous' | null;
} {
	const { point, comma, ambiguous } = votes.counts;
	if (point > 0 && comma > 0) return { decimal: null, trouble: 'mixed' };
	if (point > 0) return { decimal: '.', trouble: null };
	if (comma > 0) return { decimal: ',', trouble: null };
	return { decimal: null, trouble: ambiguous > 0 ? 'ambiguous' : null };
}
