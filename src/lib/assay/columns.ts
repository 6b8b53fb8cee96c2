/** Columns of a table: joined headers, units, and what each column seems to be. A guess is shown, never acted on silently. */
import type { Block, ColumnProposal, ColumnRole } from '$lib/schemas/sheet';
import type { SpeciesContent } from '$lib/schemas/scheme';
import { columnLetter, type SheetView } from './grid';
import { readUnit, splitHeader, type UnitReading } from './units';
import * as words from './words';

export interface ColumnHeader {
	column: number;
	/** Parts from the top row down, units taken out. */
	parts: string[];
	/** "Concentration (mmol/L) / A": as read, for showing and for saved mappings. */
	header: string;
	group?: string;
	unit: UnitReading | null;
	bracket: string | null;
	/** The header row's text was carried across from a merged or wide cell. */
	carried: boolean;
}

/** Reads the headers of every column of a block. */
export function readHeaders(view: SheetView, headerRows: number[], block: Block): ColumnHeader[] {
	const rows = headerRows.map((r, i) => {
		const lower = headerRows.slice(i + 1);
		return rowTexts(view, r, block, lower.length > 0, (c) =>
			lower.some((below) => view.text(below, c) !== '')
		);
	});
	const headers: ColumnHeader[] = [];
	for (let c = block.firstColumn; c <= block.lastColumn; c++) headers.push(oneHeader(c, rows));
	return headers;
}

interface HeaderText {
	text: string;
	carried: boolean;
}

/** Texts of one header row; above the last row, merged texts and texts followed by blanks are carried to the right. */
function rowTexts(
	view: SheetView,
	row: number,
	block: Block,
	upper: boolean,
	/** A column that a lower header row names: a blank spacer column is not. */
	named: (column: number) => boolean
): Map<number, HeaderText> {
	const texts = new Map<number, HeaderText>();
	let carry = '';
	for (let c = block.firstColumn; c <= block.lastColumn; c++) {
		const own = view.text(row, c);
		const merge = view.mergeAt(row, c);
		if (own) {
			texts.set(c, { text: own, carried: merge !== undefined && merge[3] > merge[1] });
			carry = upper && !words.isTimeWord(splitHeader(own).name) && !isNarrow(own) ? own : '';
		} else if (merge) {
			const text = view.text(merge[0], merge[1]);
			if (text && merge[3] > merge[1]) texts.set(c, { text, carried: true });
			carry = '';
		} else if (carry && named(c)) texts.set(c, { text: carry, carried: true });
	}
	return texts;
}

/** Temperature and sample names head one column, not those to their right. */
function isNarrow(text: string): boolean {
	const { name, unit } = splitHeader(text);
	return (
		unit?.of === 'temperature' ||
		unit?.of === 'time' ||
		words.isTemperatureWord(name) ||
		words.isSampleWord(name) ||
		words.isCounterWord(name) ||
		words.isCommentWord(name)
	);
}

function oneHeader(column: number, rows: Map<number, HeaderText>[]): ColumnHeader {
	const texts = rows.map((row) => row.get(column)).filter((t) => t !== undefined);
	const parts: string[] = [];
	let unit: UnitReading | null = null;
	let bracket: string | null = null;
	let group: string | undefined;
	texts.forEach(({ text, carried }, i) => {
		const lone = readUnit(text.replace(/^[([]|[)\]]$/g, ''));
		if (lone && lone.of !== 'value' && lone.of !== 'percent' && i > 0) {
			unit = lone;
			return;
		}
		const split = splitHeader(text);
		if (split.unit && !(split.unit.of === 'percent' && isShare(unit))) unit = split.unit;
		if (split.name) bracket = split.bracket;
		if (split.name && !(lone && i > 0)) parts.push(split.name);
		if (carried && i < texts.length - 1) group = text;
	});
	const header = texts
		.map((t) => t.text)
		.filter((text, i, all) => i === 0 || text !== all[i - 1])
		.join(' / ');
	const carried = texts.some((t) => t.carried);
	return { column, parts, header: header.slice(0, 200), ...(group ? { group } : {}), unit, bracket, carried };
}

/** A bare % below "Percent of charge" or "Area %" says nothing new. */
const isShare = (unit: UnitReading | null) => unit?.of === 'value' && /%/.test(unit.unit);

/** The species that a header names: its id or name exactly or but for case, apart from words such as "conc." around it. */
export function matchSpecies(header: ColumnHeader, species: SpeciesContent[]): string | null {
	const last = header.parts.at(-1) ?? '';
	const whole = matchName(header.bracket ? `${last} (${header.bracket})` : last, species);
	if (whole) return whole;
	if (words.isSpreadHeader(last)) return null;
	if (header.bracket && saysHow(header.bracket)) {
		const bare = matchName(last, species);
		if (bare) return bare;
	}
	// A line below the names may say how they were measured, or that they are means.
	for (const part of header.parts.slice(0, -1).reverse()) {
		const above = matchName(part, species);
		if (above) return above;
	}
	return null;
}

/** "RRT 1.00", "254 nm", "mg/g": how something was measured, no other name for it. */
const saysHow = (bracket: string): boolean =>
	words.isRetention(bracket) ||
	/\bnm\b|[/%·⁻^]|^(?:ppm|ppb|corr\.?|calc\.?|mean|avg\.?|n ?= ?\d+)$/i.test(bracket);

/** The same for any text, such as the name of a peak. */
export function matchName(text: string, species: SpeciesContent[]): string | null {
	const plain = text.replace(/[\s\u00a0]+/g, ' ').trim();
	const unmarked = plain.replace(/[\s]*[¹²³⁴-⁹*†‡§]+$/, '');
	const candidates = [plain, ...variants(plain), unmarked, ...variants(unmarked)];
	for (const same of [exact, caseless]) {
		for (const candidate of candidates) {
			const ids = new Set(species.filter((s) => same(candidate, s)).map((s) => s.id));
			if (ids.size === 1) return [...ids][0];
		}
	}
	return bothNames(plain, species);
}

const exact = (text: string, s: SpeciesContent) => text !== '' && (text === s.id || text === s.name);
const caseless = (text: string, s: SpeciesContent) =>
	text !== '' &&
	(text.toLowerCase() === s.id.toLowerCase() || text.toLowerCase() === (s.name ?? '').toLowerCase());

/** "[A]", "c(A)", "conc. A", "A area": the name without what is said of it. */
function variants(text: string): string[] {
	const found = new Set<string>();
	const inner = /^(?:\[(.+)\]|c ?\((.+)\)|c[_ ](.+))$/i.exec(text);
	for (const part of inner?.slice(1) ?? []) if (part) found.add(part.trim());
	const bare = text
		.replace(words.QUANTITY_WORDS, ' ')
		.replace(/[%.:,_]+(?=\s|$)|(?<=^|\s)[%.:,_]+/g, ' ')
		.replace(/\s+/g, ' ')
		.trim();
	if (bare) found.add(bare);
	// "HX-14 @ 7.3 min": the retention time is no part of the name.
	const placed = /^(.+?)\s*@/.exec(text);
	if (placed) found.add(placed[1].trim());
	found.delete(text);
	return [...found];
}

/** "HX-14 (A)": the name and the id of one species, each in its place. */
function bothNames(text: string, species: SpeciesContent[]): string | null {
	const match = /^(.+?)\s*[([](.+)[)\]]$/.exec(text);
	if (!match) return null;
	const [outer, inner] = [match[1].trim(), match[2].trim()].map((part) =>
		species.filter((s) => exact(part, s) || caseless(part, s)).map((s) => s.id)
	);
	const both = outer.filter((id) => inner.includes(id));
	return both.length === 1 ? both[0] : null;
}

export interface ColumnFacts {
	numbers: number;
	texts: number;
	/** Of the numbers, those in a date or time format. */
	dates: number;
	/** Distinct texts, up to 200. */
	distinct: number;
}

/** "RT" heads retention times; "RRT 0.87" names a peak. */
const isRetentionColumn = (name: string) => words.isRetention(name) && !/\d/.test(name);

/** What a column seems to be, by its header first and by its cells second. */
export function guessRole(header: ColumnHeader, facts: ColumnFacts, matched: string | null): ColumnRole {
	const name = header.parts.join(' ').trim();
	const last = header.parts.at(-1) ?? '';
	if (matched) return 'species';
	if (words.isSpreadHeader(last) || words.isSpreadHeader(header.header)) return 'ignore';
	if (header.unit?.of === 'temperature' || words.isTemperatureWord(last)) return 'temperature';
	if (words.isStandardWord(last)) return 'internal standard';
	if (words.isSampleWord(last)) return 'sample';
	if (words.isInjectionWord(last)) return 'injection';
	if (words.isCommentWord(last) || words.isCounterWord(last) || isRetentionColumn(last)) return 'ignore';
	// One column is the time; others that speak of it (numbers of time points, times of day) stay on the sheet.
	if (words.isTotalWord(last) || words.isClockWord(last) || words.isTimeWord(last)) return 'ignore';
	if (header.unit?.of === 'time' || header.unit?.of === 'duration') return 'ignore';
	if (facts.numbers === 0 || facts.dates === facts.numbers) return 'ignore';
	return name === '' && header.unit === null ? 'ignore' : 'species';
}

/** Unit of a header in the words of the mapping; null when none is stated or its basis is open. */
export function mappedUnit(unit: UnitReading | null): string | null {
	if (!unit) return null;
	if (unit.of === 'value' || unit.of === 'time' || unit.of === 'temperature') return unit.unit;
	return null;
}

export function proposeColumn(
	view: SheetView,
	header: ColumnHeader,
	role: ColumnRole,
	species: string | null,
	numbers: number
): ColumnProposal {
	return {
		column: header.column,
		letter: columnLetter(header.column),
		header: header.header,
		...(header.group ? { group: header.group } : {}),
		role,
		unit: mappedUnit(header.unit),
		species,
		numbers,
		...(view.columnHidden(header.column) ? { hidden: true } : {})
	};
}
