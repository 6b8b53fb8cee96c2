/** What one cell says where a value is expected, before any rule decides what to do about it. */
import { CELL, type GridCell, type GridWorkbook } from '$lib/schemas/sheet';
import { textAround } from './format-literals';
import { cellStyle, displayText, hasFlag } from './grid';
import { readMark, type Mark } from './marks';
import { hasOddSigns, numberText, parseNumber, type Decimal } from './numbers';
import { readUnit, type UnitReading } from './units';
import { valueWord } from './words';

export type CellReading =
	| { kind: 'blank' }
	/** `percent`: the cell is formatted or written as %, and `value` is already in %. `odd`: signs beyond plain ASCII. */
	| { kind: 'number'; value: number; percent: boolean; text: boolean; odd: boolean }
	/** `format`: the unit is written by the number format; the cell stores the number alone. */
	| { kind: 'with unit'; value: number; unit: UnitReading; text: string; format?: boolean }
	| { kind: 'below'; limit: number | null; which: 'loq' | 'lod' | null; text: string }
	| { kind: 'above'; limit: number | null; text: string }
	| { kind: 'not'; text: string }
	| { kind: 'trace'; text: string }
	| { kind: 'missing'; text: string }
	/** A number that reads as two, in a file whose convention is not settled. */
	| { kind: 'undecided'; text: string }
	/** A reading with a mark that has to be asked about. */
	| { kind: 'marked'; inner: CellReading; mark: Mark; text: string }
	| { kind: 'date'; text: string }
	| { kind: 'error'; text: string }
	| { kind: 'uncomputed'; text: string }
	| { kind: 'text'; text: string };

const MONTH =
	'(?:jan|feb|m[aä]r|apr|ma[iy]|jun|jul|aug|sep|o[ck]t|nov|de[cz]|f[ée]v|avr|juin|juil|ao[uû]|d[ée]c|ene|abr|ago|dic)[a-zé]*\\.?';
const DATE_TEXT = new RegExp(
	`^(?:\\d{1,2}[./-]\\d{1,2}[./-]\\d{2,4}|\\d{4}-\\d{1,2}-\\d{1,2}|\\d{1,2}[-. ]{1,2}${MONTH}(?:[-. ]{1,2}\\d{2,4})?|${MONTH}[-. ]{1,2}\\d{1,4})(?:[ T]\\d{1,2}:\\d\\d(?::\\d\\d)?)?$`,
	'i'
);
export const isDateText = (text: string): boolean => text.length <= 40 && DATE_TEXT.test(text.trim());

/** Reads one cell; `overlay` is the text of a correction, which stands in its place. */
export function readCell(
	workbook: GridWorkbook,
	cell: GridCell | undefined,
	decimal: Decimal | null,
	overlay?: string
): CellReading {
	if (overlay !== undefined) return readValueText(overlay, decimal);
	if (!cell) return { kind: 'blank' };
	if (hasFlag(cell, CELL.error)) return { kind: 'error', text: String(cell[1]) };
	if (hasFlag(cell, CELL.uncomputed)) return { kind: 'uncomputed', text: '' };
	const value = cell[1];
	if (value === null) return { kind: 'blank' };
	if (typeof value === 'boolean') return { kind: 'text', text: value ? 'TRUE' : 'FALSE' };
	if (typeof value === 'string') return readValueText(value, decimal);
	const { kind, format } = cellStyle(workbook, cell);
	if (kind === 'date' || kind === 'datetime' || kind === 'time' || kind === 'duration')
		return { kind: 'date', text: displayText(workbook, cell) };
	if (kind === 'percent')
		return { kind: 'number', value: percentOf(value), percent: true, text: false, odd: false };
	return formatted(format, value) ?? { kind: 'number', value, percent: false, text: false, odd: false };
}

/** What the number format says beside the number: a unit, a limit, a word such as n.d.; null when it says nothing of the kind. */
function formatted(format: string, value: number): CellReading | null {
	const text = textAround(format, value);
	if (text === null) return null;
	const reading = readValueText(text, '.');
	switch (reading.kind) {
		case 'with unit':
			return reading.unit.of === 'value' ? { ...reading, format: true } : null;
		case 'number':
			return reading.percent ? { ...reading, text: false, odd: false } : null;
		case 'below':
		case 'above':
		case 'not':
		case 'trace':
		case 'marked':
			return reading;
		default:
			return null;
	}
}

/** 0.07 × 100 is 7.000000000000001 in binary; fifteen digits are what the sheet holds. */
const percentOf = (value: number) => Number((value * 100).toPrecision(15));

/** Reads a text in the place of a value. */
export function readValueText(raw: string, decimal: Decimal | null): CellReading {
	const number = asNumber(raw.trim(), decimal);
	if (number) return number;
	const text = raw.replace(/[\s\u00a0]+/g, ' ').trim();
	if (text === '') return { kind: 'blank' };
	const word = valueWord(text);
	if (word) return ofWord(word, text);
	const limit = /^(<|≤|<=|＜|&lt;|>|≥|>=|＞)\s*(.+)$/.exec(text);
	if (limit) return ofLimit(limit[1], limit[2], text, decimal);
	if (isDateText(text)) return { kind: 'date', text };
	const unit = splitUnit(text, decimal);
	if (unit) return unit;
	if (/^#(DIV\/0!|REF!|N\/A|VALUE!|NAME\?|NUM!|NULL!|WERT!|BEZUG!|NV|ZAHL!)$/i.test(text))
		return { kind: 'error', text };
	return marked(text, decimal) ?? { kind: 'text', text };
}

function marked(text: string, decimal: Decimal | null): CellReading | null {
	const mark = readMark(text);
	if (!mark) return null;
	const inner = readValueText(mark.core, decimal);
	if (inner.kind === 'undecided') return { kind: 'undecided', text };
	if (
		inner.kind === 'number' ||
		inner.kind === 'with unit' ||
		inner.kind === 'below' ||
		inner.kind === 'above'
	)
		return { kind: 'marked', inner, mark, text };
	return null;
}

function asNumber(text: string, decimal: Decimal | null): CellReading | null {
	const readings = numberText(text);
	if (!readings) return null;
	const value = parseNumber(text, decimal);
	if (value !== null) return { kind: 'number', value, percent: false, text: true, odd: hasOddSigns(text) };
	// A file of the other convention: the cell means something, but not here.
	return decimal === null ? { kind: 'undecided', text } : { kind: 'text', text };
}

function ofWord(word: ReturnType<typeof valueWord>, text: string): CellReading {
	if (word === 'below loq') return { kind: 'below', limit: null, which: 'loq', text };
	if (word === 'below lod') return { kind: 'below', limit: null, which: 'lod', text };
	if (word === 'not') return { kind: 'not', text };
	if (word === 'trace') return { kind: 'trace', text };
	if (word === 'over') return { kind: 'above', limit: null, text };
	return { kind: 'missing', text };
}

function ofLimit(sign: string, rest: string, text: string, decimal: Decimal | null): CellReading {
	const kind = /[<≤＜&]/.test(sign) ? 'below' : 'above';
	const number = readValueText(rest, decimal);
	if (number.kind === 'undecided') return { kind: 'undecided', text };
	let limit: number;
	if (number.kind === 'number') limit = number.value;
	else if (number.kind === 'with unit' && number.unit.of !== 'time') return { ...number, text, kind: 'text' };
	else if (number.kind === 'marked' && number.inner.kind === 'number')
		return { ...number, inner: limitOf(kind, number.inner.value, text), text };
	else return { kind: 'text', text };
	return limitOf(kind, limit, text);
}

const limitOf = (kind: 'below' | 'above', limit: number, text: string): CellReading =>
	kind === 'below' ? { kind, limit, which: null, text } : { kind: 'above', limit, text };

function splitUnit(text: string, decimal: Decimal | null): CellReading | null {
	const match = /^([+\-\u2212]?[\d.,'’ ]*\d)\s*([^\d\s.,].*)$/.exec(text);
	if (!match) return null;
	const unit = readUnit(match[2]);
	if (!unit) return null;
	const value = parseNumber(match[1], decimal);
	if (value === null) return numberText(match[1]) && decimal === null ? { kind: 'undecided', text } : null;
	if (unit.of === 'percent')
		return { kind: 'number', value, percent: true, text: true, odd: hasOddSigns(text) };
	return { kind: 'with unit', value, unit, text };
}

/** True when a cell counts as a value for finding tables: a number, a limit, or one of the words that stand for one. */
export function isValueLike(reading: CellReading): boolean {
	return (
		reading.kind === 'number' ||
		reading.kind === 'with unit' ||
		reading.kind === 'below' ||
		reading.kind === 'above' ||
		reading.kind === 'not' ||
		reading.kind === 'trace' ||
		reading.kind === 'marked' ||
		reading.kind === 'undecided'
	);
}

/** The texts of a file that vote on its decimal convention: the number in a cell without limit sign and unit. */
export function numberPart(text: string): string {
	if (/^[\d.,]+$/.test(text)) return text;
	const plain = text.trim();
	return (readMark(plain)?.core ?? plain)
		.replace(/^(?:<=?|>=?|≤|≥)\s*/, '')
		.replace(/^([+\-\u2212]?[\d.,'’\s\u00a0\u2009\u202f]*\d)\s*[^\d\s.,][^\d]*.*$/, '$1')
		.replace(/\s*%$/, '');
}
