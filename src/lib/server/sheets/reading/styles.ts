/** Cell formats of a workbook (styles.xml): number format, colour and strike-through; nothing else is kept. */
import { builtInFormat, formatKind } from '$lib/assay/number-format';
import type { CellStyle } from '$lib/schemas/sheet';
import type { Package } from './package';
import { damaged } from './refusal';

const MOST_FORMATS = 65_000;

export interface StyleTable {
	/** Distinct styles; 0 is plain. */
	styles: CellStyle[];
	/** Cell format index of the file to index into `styles`. */
	index: number[];
	/** Cell formats that mark text by a leading apostrophe. */
	quoted: Set<number>;
	/** Index of a style with this format, added when needed. */
	withFormat(format: string): number;
}

export function plainStyles(): StyleTable {
	const styles: CellStyle[] = [{ format: 'General', kind: 'general' }];
	const known = new Map([[keyOf(styles[0]), 0]]);
	const add = (style: CellStyle) => {
		const key = keyOf(style);
		const at = known.get(key);
		if (at !== undefined) return at;
		known.set(key, styles.length);
		return styles.push(style) - 1;
	};
	const withFormat = (format: string) => add({ format, kind: formatKind(format) });
	return { styles, index: [], quoted: new Set(), withFormat, add } as StyleTable & Adder;
}

interface Adder {
	add(style: CellStyle): number;
}
const keyOf = (s: CellStyle) => `${s.format}|${s.coloured ? 1 : 0}${s.struck ? 1 : 0}`;

interface Font {
	struck: boolean;
	coloured: boolean;
}

export function readStyles(pack: Package, part: string | undefined): StyleTable {
	const table = plainStyles() as StyleTable & Adder;
	if (!part || !pack.has(part)) return table;
	const formats = new Map<number, string>();
	const fonts: Font[] = [];
	const fills: boolean[] = [];
	const path: string[] = [];
	const inside = (name: string) => path.includes(name);
	pack.read(part, {
		open: (name, a) => {
			path.push(name);
			if (path.length > 60 || fonts.length > MOST_FORMATS || fills.length > MOST_FORMATS)
				throw damaged('its styles are too many');
			if (inside('dxfs')) return;
			if (name === 'numFmt') formats.set(Number(a.numFmtId), (a.formatCode ?? 'General').slice(0, 300));
			else if (name === 'font' && inside('fonts')) fonts.push({ struck: false, coloured: false });
			else if (name === 'strike' && fonts.length > 0 && inside('fonts'))
				fonts[fonts.length - 1].struck = isOn(a.val);
			else if (name === 'color' && fonts.length > 0 && inside('fonts'))
				fonts[fonts.length - 1].coloured = isColour(a);
			else if (name === 'fill' && inside('fills')) fills.push(false);
			else if (name === 'patternFill' && fills.length > 0)
				fills[fills.length - 1] = !['none', 'gray125', undefined].includes(a.patternType);
			else if (name === 'fgColor' && fills[fills.length - 1]) fills[fills.length - 1] = !isWhite(a);
			else if (name === 'gradientFill' && fills.length > 0) fills[fills.length - 1] = true;
			else if (name === 'xf' && path.at(-2) === 'cellXfs') addFormat(table, a, formats, fonts, fills);
		},
		close: () => {
			path.pop();
		}
	});
	return table;
}

function addFormat(
	table: StyleTable & Adder,
	a: Readonly<Record<string, string>>,
	formats: Map<number, string>,
	fonts: Font[],
	fills: boolean[]
): void {
	if (table.index.length > MOST_FORMATS) throw damaged('its styles are too many');
	const id = Number(a.numFmtId ?? 0);
	const format = formats.get(id) ?? builtInFormat(id);
	const font = fonts[Number(a.fontId ?? 0)];
	const style: CellStyle = { format, kind: formatKind(format) };
	if (font?.coloured || fills[Number(a.fillId ?? 0)]) style.coloured = true;
	if (font?.struck) style.struck = true;
	if (isOn(a.quotePrefix ?? '0')) table.quoted.add(table.index.length);
	table.index.push(table.add(style));
}

const isOn = (value: string | undefined) => value === undefined || value === '1' || value === 'true';

/** Black, in any of its spellings, is no colour. */
function isColour(a: Readonly<Record<string, string>>): boolean {
	if (a.rgb) return !/^(?:FF|00)?000000$/i.test(a.rgb);
	if (a.theme) return a.theme !== '1' && a.theme !== '0';
	if (a.indexed) return !['0', '8', '64'].includes(a.indexed);
	return false;
}

function isWhite(a: Readonly<Record<string, string>>): boolean {
	if (a.rgb) return /^(?:FF|00)?FFFFFF$/i.test(a.rgb);
	if (a.theme) return a.theme === '0' && (a.tint === undefined || Number(a.tint) === 0);
	return a.indexed === '1' || a.indexed === '9' || a.indexed === '65';
}
