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
	Proposal,
	SavedMapping,
	TableProposal
} from '$lib/schemas/sheet';
import { readCell } from './cells';
import { factsOf, isTable } from './column-facts';
import {
	type ColumnFacts,
	type ColumnHeader,
	guessRole,
	mappedUnit,
	matchSpecies,
	proposeColumn,
	readHeaders
} from './columns';
import { plural, someOf } from './examination';
import { rangeText, type SheetView } from './grid';
import { statedLimits } from './limits';
import { longLayout, peakCounts, peaksOf, useLong } from './long-layout';
import { decide } from './numbers';
import { speaksOfTime } from './rows';
import { savedFor, withSaved } from './saved-mapping';
import { settle } from './settle';
import { MOST_COLUMNS } from './side-by-side';
import { suggestConditions } from './suggestions';
import { type FoundTable, tablesOf, viewOf, votesOf } from './tables';
import { timeColumnOf } from './time-column';

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
