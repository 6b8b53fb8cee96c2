/** One table as proposed: what its columns seem to be, what the sheet says of its conditions, and the questions that it raises. */
import type { SpeciesContent } from '$lib/schemas/scheme';
import type {
	ColumnMapping,
	ColumnProposal,
	GridWorkbook,
	Mapping,
	SavedMapping,
	TableProposal
} from '$lib/schemas/sheet';
import { factsOf } from './column-facts';
import {
	type ColumnFacts,
	type ColumnHeader,
	guessRole,
	mappedUnit,
	matchSpecies,
	proposeColumn,
	readHeaders
} from './columns';
import type { Checks } from './examination';
import { columnLetter, rangeText, type SheetView } from './grid';
import { statedLimits, type StatedLimit } from './limits';
import { longLayout, peakCounts, peaksOf, useLong } from './long-layout';
import { decide } from './numbers';
import { keepAsProposed } from './as-proposed';
import { asOnSheet } from './orientation';
import { replicateSpecies } from './replicate-headers';
import { savedFor, withSaved } from './saved-mapping';
import { settle } from './settle';
import { suggestConditions } from './suggestions';
import { blockOnSheet, type FoundTable, viewOf, viewOfTable, votesOf } from './tables';
import { timeColumnOf } from './time-column';
import { partsBehind } from './time-parts';
import { commonUnit, unitColumn } from './unit-column';

export interface ProposeOptions {
	saved?: SavedMapping[];
	/** Constants that the fit of one run would have to find. */
	parameters?: number;
	/** Limits of the site or the group, where they differ from the usual ones. */
	checks?: Partial<Checks>;
}

export function proposeTable(
	workbook: GridWorkbook,
	species: SpeciesContent[],
	found: FoundTable,
	id: string,
	options: ProposeOptions
): TableProposal {
	const view = viewOfTable(workbook, found) as SheetView;
	const sheet = viewOf(workbook, found.sheet) as SheetView;
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
		...(found.across ? { across: { headerColumns: [], leftOutColumns: [], rows: [] } } : {}),
		...(long ? { peaks: peaksOf(view, found, long.peak, species) } : {}),
		leftOutRows: found.leftOutRows,
		decimal
	};
	if (long) {
		useLong(mapping, columns, long);
		stateUnit(view, found, mapping);
	}
	const names = headers.map((h) => h.header);
	// Runs that share their headers differ in their columns: a kept mapping is only one of them.
	const saved = found.only ? undefined : savedFor(options.saved ?? [], names, found.across);
	if (saved) mapping = withSaved(mapping, saved);
	const { parameters, checks } = options;
	const proposed = asOnSheet(mapping);
	const settled = settle({ workbook, species, mapping: proposed, parameters, checks });
	if (parameters === undefined) keepAsProposed(proposed, settled);
	const limits = statedLimits(view, sheet, found, decimal);
	return {
		id,
		title: found.title,
		sheet: found.sheet,
		range: rangeText(blockOnSheet(found)),
		block: blockOnSheet(found),
		headerRows: found.across ? [] : found.headerRows,
		footerRows: found.across ? [] : found.footerRows,
		...seriesOf(
			found,
			columns.map((c, i) => ({ ...c, role: mapping.columns[i].role }))
		),
		...(mapping.peaks ? { peaks: peakCounts(view, found, long?.peak ?? 0, mapping.peaks) } : {}),
		mapping: proposed,
		...(saved ? { savedMapping: saved.name } : {}),
		suggested: {
			...suggestConditions(view, sheet, found, mapping, species, decimal),
			...(limits.loq ? { loq: suggestion(limits.loq) } : {}),
			...(limits.lod ? { lod: suggestion(limits.lod) } : {})
		},
		findings: settled.findings
	};
}

/** The unit of the values of a long list, where a column states it. */
function stateUnit(view: SheetView, found: FoundTable, mapping: Mapping): void {
	const value = mapping.columns.find((c) => c.role === 'value');
	const column = unitColumn(view, mapping);
	if (!value || value.unit !== null || column === 0) return;
	value.unit = commonUnit(view, view.filledRows(found.block.firstRow, found.block.lastRow), column);
}

const suggestion = ({ value, unit, source }: StatedLimit) => ({ value, unit: unit ?? '', source });

/** The series of a table; where they are rows, its columns are those of the sheet, for showing. */
function seriesOf(found: FoundTable, columns: ColumnProposal[]): Pick<TableProposal, 'columns' | 'rows'> {
	if (!found.across) return { columns };
	const { firstColumn, lastColumn } = blockOnSheet(found);
	const shown = [...found.headerRows.filter((c) => c < firstColumn)];
	for (let c = firstColumn; c <= lastColumn; c++) shown.push(c);
	return {
		columns: shown.map((column) => ({
			column,
			letter: columnLetter(column),
			header: '',
			role: 'ignore',
			unit: null,
			species: null,
			numbers: 0
		})),
		rows: columns.map(({ column, letter: _letter, ...rest }) => ({ row: column, ...rest }))
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
	const rows = view.filledRows(found.block.firstRow, found.block.lastRow);
	const parts = new Set(partsBehind(view, rows, headers, time).map((p) => p.column));
	const replicates = replicateSpecies(
		headers.filter((h) => h.column !== time),
		species
	);
	let temperature = false;
	return headers.map((h) => {
		const own = facts.get(h.column) ?? { numbers: 0, texts: 0, dates: 0, distinct: 0 };
		const isTime = h.column === time || parts.has(h.column);
		const matched = isTime ? null : (matchSpecies(h, species) ?? replicates.get(h.column) ?? null);
		let role = isTime ? ('time' as const) : guessRole(h, own, matched);
		if (!isTime && found.only && h.carried && !found.only.has(h.column)) role = 'ignore';
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
