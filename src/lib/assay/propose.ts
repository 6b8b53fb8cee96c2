/**
 * The first look at a workbook: which tables it holds, what their columns seem to be, what has to be asked. A proposal changes
 * nothing; a person confirms or corrects it, and `settle` makes the run.
 */
import type { SpeciesContent } from '$lib/schemas/scheme';
import type {
	Block,
	ColumnMapping,
	ColumnProposal,
	Finding,
	GridWorkbook,
	Mapping,
	PeakMapping,
	Proposal,
	SavedMapping,
	TableProposal
} from '$lib/schemas/sheet';
import {
	guessRole,
	mappedUnit,
	matchName,
	matchSpecies,
	proposeColumn,
	readHeaders,
	type ColumnFacts,
	type ColumnHeader
} from './columns';
import { readCell } from './cells';
import { plural, someOf } from './examination';
import { rangeText, type SheetView } from './grid';
import { statedLimits } from './limits';
import { decide } from './numbers';
import { speaksOfTime } from './rows';
import { savedFor, withSaved } from './saved-mapping';
import { settle } from './settle';
import { suggestConditions } from './suggestions';
import { MOST_COLUMNS } from './blocks';
import { tablesOf, timeColumnByHeader, viewOf, votesOf, type FoundTable } from './tables';
import { readTime } from './times';
import { isPeakValueWord, isPeakWord } from './words';

export interface ProposeOptions {
	saved?: SavedMapping[];
	/** Constants that the fit of one run would have to find. */
	parameters?: number;
}

export function propose(
	workbook: GridWorkbook,
	species: SpeciesContent[],
	options: ProposeOptions = {}
): Proposal {
	const found = tablesOf(workbook).filter((t) => isTable(workbook, t));
	const tables = found.map((t, i) => proposeTable(workbook, species, t, `t${i + 1}`, options));
	return {
		tables,
		findings: workbookFindings(workbook, tables),
		sheets: [
			...workbook.sheets.map((s) => ({
				name: s.name,
				state: s.state,
				tables: tables.filter((t) => t.sheet === s.name).map((t) => t.id),
				what: sheetWords(s.rows.length, tables.filter((t) => t.sheet === s.name).length)
			})),
			...(workbook.otherSheets ?? []).map((name) => ({
				name,
				state: 'visible' as const,
				tables: [],
				what: 'a chart or another sheet without cells'
			}))
		]
	};
}

/** A table that the person draws on the sheet: header rows are taken from directly above it when not given. */
export function proposeBlock(
	workbook: GridWorkbook,
	species: SpeciesContent[],
	sheet: string,
	drawn: Block,
	headerRows: number[] | null = null,
	id = 'drawn',
	options: ProposeOptions = {}
): TableProposal | null {
	const view = viewOf(workbook, sheet);
	if (!view) return null;
	const block = within(drawn, view);
	const near = tablesOf(workbook).find(
		(t) => t.sheet === sheet && t.block.firstRow <= block.lastRow && t.block.lastRow >= block.firstRow
	);
	const headers = headerRows ?? near?.headerRows.filter((r) => r < block.firstRow) ?? [];
	const found: FoundTable = {
		sheet,
		block,
		headerRows: headers,
		limitRows: near?.limitRows ?? [],
		footerRows: [],
		leftOutRows: [],
		title: near?.title ?? sheet,
		above: near?.above ?? []
	};
	return proposeTable(workbook, species, found, id, options);
}

/** The part of a drawn block that the sheet fills, at most as wide as a mapping may be. */
function within(drawn: Block, view: SheetView): Block {
	const lastRow = Math.min(drawn.lastRow, Math.max(view.sheet.lastRow, drawn.firstRow));
	const widest = drawn.firstColumn + MOST_COLUMNS - 1;
	const lastColumn = Math.min(drawn.lastColumn, widest, Math.max(view.sheet.lastColumn, drawn.firstColumn));
	return {
		...drawn,
		lastRow: Math.max(lastRow, drawn.firstRow),
		lastColumn: Math.max(lastColumn, drawn.firstColumn)
	};
}

function sheetWords(rows: number, tables: number): string {
	if (tables > 0) return plural(tables, 'table');
	return rows === 0 ? 'empty' : 'no table with a time column';
}

/** A time column by header, or by its numbers, and at least one other column of numbers. */
function isTable(workbook: GridWorkbook, found: FoundTable): boolean {
	const view = viewOf(workbook, found.sheet);
	if (!view) return false;
	const time = timeColumnOf(view, found);
	if (time === 0 || found.block.lastRow === found.block.firstRow) return false;
	const headers = readHeaders(view, found.headerRows, found.block);
	return headers.some((h) => h.column !== time && factsOf(view, found, h.column).numbers > 0);
}

export function timeColumnOf(view: SheetView, found: FoundTable): number {
	const named = timeColumnByHeader(view, found.headerRows, found.block);
	if (named > 0) return named;
	// Names of samples that are times, "t=15 min" or "2 h".
	for (let c = found.block.firstColumn; c <= found.block.lastColumn; c++)
		if (namesTimes(view, found, c)) return c;
	if (found.headerRows.length > 0) return 0;
	// Without any header, the first column of three or more numbers that never decrease.
	for (let c = found.block.firstColumn; c <= found.block.lastColumn; c++)
		if (increases(view, found, c)) return c;
	return 0;
}

function namesTimes(view: SheetView, found: FoundTable, column: number): boolean {
	let times = 0;
	let others = 0;
	for (const r of view.filledRows(found.block.firstRow, found.block.lastRow)) {
		const cell = view.cell(r, column);
		if (typeof cell?.[1] !== 'string') continue;
		if (readTime(view.workbook, cell, null).kind === 'worded') times++;
		else others++;
	}
	return times >= 3 && times >= others * 4;
}

function increases(view: SheetView, found: FoundTable, column: number): boolean {
	let before = -Infinity;
	let count = 0;
	for (const r of view.filledRows(found.block.firstRow, found.block.lastRow)) {
		const reading = readTime(view.workbook, view.cell(r, column), null);
		if (reading.kind === 'blank') continue;
		if (reading.kind !== 'number' && reading.kind !== 'serial') return false;
		const value = reading.kind === 'number' ? reading.value : reading.days;
		if (value < before) return false;
		before = value;
		count++;
	}
	return count >= 3;
}

const knownFacts = new WeakMap<FoundTable, Map<number, ColumnFacts>>();

/** Counted once for each column of a table. */
export function factsOf(view: SheetView, found: FoundTable, column: number): ColumnFacts {
	const own = knownFacts.get(found) ?? new Map<number, ColumnFacts>();
	knownFacts.set(found, own);
	const facts = own.get(column) ?? countFacts(view, found, column);
	own.set(column, facts);
	return facts;
}

function countFacts(view: SheetView, found: FoundTable, column: number): ColumnFacts {
	const facts = { numbers: 0, texts: 0, distinct: 0 };
	const distinct = new Set<string>();
	for (const r of view.filledRows(found.block.firstRow, found.block.lastRow)) {
		const cell = view.cell(r, column);
		if (!cell) continue;
		const { kind } = readCell(view.workbook, cell, null);
		if (kind === 'number' || kind === 'undecided' || kind === 'with unit' || kind === 'date') facts.numbers++;
		else if (kind === 'text') {
			facts.texts++;
			if (distinct.size < 200) distinct.add(String(cell[1]));
		}
	}
	facts.distinct = distinct.size;
	return facts;
}

function proposeTable(
	workbook: GridWorkbook,
	species: SpeciesContent[],
	found: FoundTable,
	id: string,
	options: ProposeOptions
): TableProposal {
	const view = viewOf(workbook, found.sheet) as SheetView;
	const headers = readHeaders(view, found.headerRows, found.block);
	const facts = new Map(headers.map((h) => [h.column, factsOf(view, found, h.column)]));
	const columns = columnsOf(view, found, headers, facts, species);
	const long = longLayout(headers, facts, columns);
	const decimal = decide(votesOf(workbook)).decimal;
	let mapping: Mapping = {
		table: id,
		sheet: found.sheet,
		block: found.block,
		headerRows: found.headerRows,
		layout: long ? 'long' : 'wide',
		columns: columns.map((c) => mappingOf(c, headers)),
		...(long ? { peaks: peaksOf(view, found, long.peak, species) } : {}),
		leftOutRows: found.leftOutRows,
		decimal
	};
	if (long) useLong(mapping, columns, long);
	const saved = savedFor(
		options.saved ?? [],
		headers.map((h) => h.header)
	);
	if (saved) mapping = withSaved(mapping, saved);
	const settled = settle({ workbook, species, mapping, parameters: options.parameters });
	const limits = statedLimits(view, found, decimal);
	const suggested = suggestConditions(view, found, mapping, species, decimal);
	return {
		id,
		title: found.title,
		sheet: found.sheet,
		range: rangeText(found.block),
		block: found.block,
		headerRows: found.headerRows,
		footerRows: found.footerRows,
		columns: columns.map((c, i) => ({ ...c, role: mapping.columns[i].role })),
		...(mapping.peaks ? { peaks: peakCounts(view, found, long?.peak ?? 0, mapping.peaks) } : {}),
		mapping,
		...(saved ? { savedMapping: saved.name } : {}),
		suggested: {
			...suggested,
			...(limits.loq
				? { loq: { value: limits.loq.value, unit: limits.loq.unit ?? '', source: limits.loq.source } }
				: {}),
			...(limits.lod
				? { lod: { value: limits.lod.value, unit: limits.lod.unit ?? '', source: limits.lod.source } }
				: {})
		},
		findings: settled.findings
	};
}

function columnsOf(
	view: SheetView,
	found: FoundTable,
	headers: ColumnHeader[],
	facts: Map<number, ColumnFacts>,
	species: SpeciesContent[]
): ColumnProposal[] {
	const time = timeColumnOf(view, found);
	let temperature = false;
	return headers.map((h) => {
		const own = facts.get(h.column) ?? { numbers: 0, texts: 0, distinct: 0 };
		const matched = h.column === time ? null : matchSpecies(h, species);
		let role = h.column === time ? ('time' as const) : guessRole(h, own, matched);
		// One log is used; further temperatures (jacket, bath) stay on the sheet.
		if (role === 'temperature' && temperature) role = 'ignore';
		if (role === 'temperature') temperature = true;
		return proposeColumn(view, h, role, matched, own.numbers);
	});
}

function mappingOf(c: ColumnProposal, headers: ColumnHeader[]): ColumnMapping {
	const header = headers.find((h) => h.column === c.column);
	const unit = header ? mappedUnit(header.unit) : null;
	const fits =
		c.role === 'time'
			? header?.unit?.of === 'time'
			: c.role === 'temperature'
				? header?.unit?.of === 'temperature'
				: header?.unit?.of === 'value';
	return {
		column: c.column,
		role: c.role,
		unit: fits ? unit : null,
		...(c.role === 'species' ? { weights: c.species ? { [c.species]: 1 } : {} } : {}),
		...(c.header ? { label: c.header.slice(0, 120) } : {})
	};
}

/* ---------------------------------------------------------------- long layout */

interface Long {
	peak: number;
	value: number;
}

/** One row a peak: a column of names that come again and again, and a column of values. */
function longLayout(
	headers: ColumnHeader[],
	facts: Map<number, ColumnFacts>,
	columns: ColumnProposal[]
): Long | null {
	const named = (h: ColumnHeader) => h.parts.at(-1) ?? '';
	const peak = headers.find((h) => {
		const f = facts.get(h.column);
		return f && isPeakWord(named(h)) && f.texts > f.numbers && f.texts >= 4 && f.distinct * 2 <= f.texts;
	});
	if (!peak) return null;
	const values = headers.filter(
		(h) =>
			h.column !== peak.column &&
			(facts.get(h.column)?.numbers ?? 0) > 0 &&
			isPeakValueWord(named(h) || h.header)
	);
	const isTime = (h: ColumnHeader) => columns.find((c) => c.column === h.column)?.role === 'time';
	const best =
		values.find((h) => h.unit?.of === 'value' && h.unit.unit !== 'area' && !isTime(h)) ??
		values.find((h) => !isTime(h));
	return best ? { peak: peak.column, value: best.column } : null;
}

function useLong(mapping: Mapping, columns: ColumnProposal[], long: Long): void {
	for (const c of mapping.columns) {
		if (c.column === long.peak) Object.assign(c, { role: 'peak', unit: null, weights: undefined });
		else if (c.column === long.value) Object.assign(c, { role: 'value', weights: undefined });
		else if (c.role === 'species') Object.assign(c, { role: 'ignore', weights: undefined });
	}
	for (const c of mapping.columns) if (c.weights === undefined) delete c.weights;
	columns.forEach((c, i) => (c.role = mapping.columns[i].role));
}

const MOST_PEAKS = 200;

function peaksOf(
	view: SheetView,
	found: FoundTable,
	column: number,
	species: SpeciesContent[]
): PeakMapping[] {
	const peaks = new Map<string, PeakMapping>();
	for (const r of view.filledRows(found.block.firstRow, found.block.lastRow)) {
		if (peaks.size >= MOST_PEAKS) break;
		const peak = view.text(r, column).slice(0, 120);
		if (!peak || peaks.has(peak)) continue;
		const id = matchName(peak, species);
		peaks.set(peak, { peak, ...(id ? { weights: { [id]: 1 } } : {}) });
	}
	return [...peaks.values()];
}

function peakCounts(
	view: SheetView,
	found: FoundTable,
	column: number,
	peaks: PeakMapping[]
): TableProposal['peaks'] {
	const counts = new Map<string, number>();
	for (const r of view.filledRows(found.block.firstRow, found.block.lastRow)) {
		const peak = view.text(r, column).slice(0, 120);
		counts.set(peak, (counts.get(peak) ?? 0) + 1);
	}
	return peaks.map((p) => ({
		peak: p.peak,
		values: counts.get(p.peak) ?? 0,
		species: Object.keys(p.weights ?? {})[0] ?? null
	}));
}

/* ---------------------------------------------------------------- the whole workbook */

/** A row that begins with a time word and goes on with numbers. */
function runsAcross(workbook: GridWorkbook): boolean {
	return workbook.sheets.some((sheet) =>
		sheet.rows.slice(0, 200).some(({ c }) => {
			if (c.length < 4 || typeof c[0][1] !== 'string' || !speaksOfTime(c[0][1])) return false;
			return c.slice(1).every((cell) => readCell(workbook, cell, null).kind === 'number');
		})
	);
}

function workbookFindings(workbook: GridWorkbook, tables: TableProposal[]): Finding[] {
	const base = { sheet: '', cells: [], count: 0, expected: '', options: [], open: false };
	const findings: Finding[] = [];
	if (tables.length === 0)
		findings.push({
			...base,
			id: 'B1:workbook',
			level: 'stop',
			rule: 'B1',
			found: 'no table with a time column and numbers beside it',
			expected: 'a header row with a time column, for example "Time (h)", and a column for each species',
			message: runsAcross(workbook)
				? 'The times seem to run across, one column a sample. One row a sample is expected: copy the table, paste it transposed, and upload it again.'
				: 'No table was found: a time column with values beside it is expected. Mark the rows yourself, or upload a sheet in the form of the template.',
			open: true
		});
	const hidden = workbook.sheets.filter(
		(s) => s.state !== 'visible' && !tables.some((t) => t.sheet === s.name)
	);
	if (hidden.length > 0)
		findings.push({
			...base,
			id: 'B29:workbook',
			level: 'note',
			rule: 'B29',
			sheet: hidden[0].name,
			found: `${plural(hidden.length, 'hidden sheet')}: ${someOf(hidden.map((s) => `"${s.name}"`))}`,
			message: `${someOf(hidden.map((s) => `"${s.name}"`))} ${hidden.length === 1 ? 'is a hidden sheet' : 'are hidden sheets'} without a table; not used.`
		});
	return findings;
}
