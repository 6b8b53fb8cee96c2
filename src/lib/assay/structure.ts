/** Rules about the table as a whole: B1, B2, B27, B30, B31, B37 and errors outside the block (B25). */
import { CELL } from '$lib/schemas/sheet';
import type { Examination } from './examination';
import { capital, figure, plural, someOf } from './wording';
import { hasFlag } from './grid';

/** Rows of the block that hold data, in order. */
export function dataRows(ex: Examination): number[] {
	const { block, leftOutRows } = ex.mapping;
	const out = new Set(leftOutRows);
	return ex.view.sheet.rows
		.map((row) => row.r)
		.filter((r) => r >= block.firstRow && r <= block.lastRow && !out.has(r));
}

export interface BlockFacts {
	/** Blank rows within. */
	blank: number[];
	/** Rows below that hold numbers and whose first cell does not say why they are no data. */
	doubtfulRows: number[];
	/** Rows further below, in the same columns and without a header, where the times go on. */
	further: { firstRow: number; lastRow: number } | null;
	/** The time column, and whether its header says so. */
	time: number;
	timeByHeader: boolean;
	headers: boolean;
}

/** B1: only asked where the block could be meant otherwise. */
export function askBlock(ex: Examination, facts: BlockFacts): void {
	const { block } = ex.mapping;
	const { places } = ex;
	const doubts: string[] = [];
	if (facts.blank.length > 0)
		doubts.push(
			`${plural(facts.blank.length, `blank ${places.line}`)} inside (${someOf(facts.blank.map((r) => places.sample(r)))})`
		);
	if (facts.doubtfulRows.length > 0)
		doubts.push(`${places.samples(facts.doubtfulRows)} ${places.across ? 'at the right' : 'below'} left out`);
	if (facts.further)
		doubts.push(
			`rows ${facts.further.firstRow}–${facts.further.lastRow} further below, without a header, are not among them`
		);
	if (!facts.headers) doubts.push(places.across ? 'no names at the left' : 'no header row above');
	else if (!facts.timeByHeader) doubts.push(withoutTime(ex, facts.time));
	const measured = numbersInHeaders(ex);
	if (measured.length > 0)
		doubts.push(`${places.samples(measured)} counted as header although numbers stand there`);
	if (places.across) return askAcross(ex, facts.time, doubts);
	if (doubts.length === 0) return;
	ex.ask({
		rule: 'B1',
		level: 'ask',
		cells: [ex.at(block.firstRow, block.firstColumn), ex.at(block.lastRow, block.lastColumn)],
		key: places.range(block),
		found: `${places.range(block)}: ${doubts.join(', ')}`,
		expected: 'the rows and columns that hold the data',
		message: `We read rows ${block.firstRow}–${block.lastRow} of "${ex.sheet}" as the data (${doubts.join('; ')}). Is that right?`,
		options: [{ key: 'right', label: 'Yes, these rows' }]
	});
}

/** Rows read as further header rows that hold measured numbers: a first sample whose time is no time, such as "start". */
function numbersInHeaders(ex: Examination): number[] {
	const columns = ex.mapping.columns.filter((c) => c.role === 'species' || c.role === 'value');
	return ex.mapping.headerRows.slice(1).filter((row) => {
		const numbers = columns.flatMap((c) => {
			const reading = ex.value(row, c.column);
			return reading.kind === 'number' ? [reading.value] : [];
		});
		// Counted columns, "1 | 2 | 3", are numbers of replicates.
		return numbers.some((n) => !Number.isInteger(n) || n < 1 || n > columns.length);
	});
}

/** "no column whose header says time", and what was taken for the times. */
function withoutTime(ex: Examination, time: number): string {
	const none = `no ${ex.places.across ? 'row' : 'column'} whose header says time`;
	if (time === 0) return none;
	const row = dataRows(ex).find((r) => ex.time(r, time).kind === 'worded' && ex.shown(r, time) !== '');
	if (row === undefined) return `${none}; ${ex.places.series(time)} was taken`;
	const reading = ex.time(row, time);
	const minutes =
		reading.kind === 'worded'
			? `, "${ex.shown(row, time).slice(0, 40)}" as ${figure(reading.seconds / 60)} min`
			: '';
	return `${none}; times read from the names in ${ex.places.series(time)}${minutes}`;
}

/** B1 for times that run across: never read so without a word. */
function askAcross(ex: Examination, time: number, doubts: string[]): void {
	const { block, headerRows } = ex.mapping;
	const also = doubts.length > 0 ? ` (${doubts.join('; ')})` : '';
	ex.ask({
		rule: 'B1',
		level: 'ask',
		cells: [
			ex.at(headerRows.at(-1) ?? block.firstRow, time || block.firstColumn),
			ex.at(block.lastRow, block.lastColumn)
		],
		key: `across-${ex.places.range(block)}`,
		found: `times in row ${time || block.firstColumn}, one column a sample${also}`,
		expected: 'one row a sample, or your word that each row is a series',
		message: `Times run across row ${time || block.firstColumn} of "${ex.sheet}"${also}. Read each row of ${ex.places.range(block)} as a species and each column as a sample?`,
		options: [{ key: 'right', label: 'Yes, each row is a series' }]
	});
}

/** B30: colours and strike-through are seen, not interpreted; the person may leave the marked values out. Gives their cells then. */
export function noteColours(ex: Examination, rows: number[]): Set<string> {
	const marked: string[] = [];
	let coloured = 0;
	let struck = 0;
	const used = new Set(ex.mapping.columns.filter((c) => c.role !== 'ignore').map((c) => c.column));
	for (const r of rows) {
		for (const cell of ex.view.cellsOfRow(r)) {
			if (!used.has(cell[0])) continue;
			const style = ex.view.style(r, cell[0]);
			if (style.coloured) coloured++;
			if (style.struck) struck++;
			if (style.coloured || style.struck) marked.push(ex.at(r, cell[0]));
		}
	}
	// A whole block in one colour is decoration.
	if (marked.length === 0 || (struck === 0 && coloured > rows.length * used.size * 0.6)) return new Set();
	const what = [coloured ? `${coloured} coloured` : '', struck ? `${struck} struck through` : '']
		.filter(Boolean)
		.join(', ');
	const taken = ex.note({
		rule: 'B30',
		cells: marked,
		key: 'colours',
		found: what,
		message: `${plural(marked.length, 'cell')} in the data ${marked.length === 1 ? 'is' : 'are'} marked (${what}): ${someOf(marked)}. Colours are not imported. Exclude any?`,
		expected: 'values without a mark, or your word on what the marks mean',
		options: [
			{ key: 'keep', label: 'Use them like the others' },
			{ key: 'missing', label: 'Leave the marked values as missing' }
		]
	});
	return new Set(taken?.key === 'missing' ? marked : []);
}

/** B27 and B25: what lies below the table is shown and left out. */
export function noteFooters(ex: Examination, footerRows: number[]): void {
	const inside = footerRows.filter((r) => r > ex.mapping.block.lastRow || ex.mapping.leftOutRows.includes(r));
	if (inside.length > 0) {
		const leads = inside.map(
			(r) =>
				ex.view
					.cellsOfRow(r)
					.map((c) => ex.shown(r, c[0]))
					.find(Boolean) ?? ''
		);
		ex.note({
			rule: 'B27',
			cells: inside.map((r) => ex.at(r, ex.mapping.block.firstColumn)),
			key: 'footers',
			found: someOf(leads.filter(Boolean).map((t) => `"${t.slice(0, 40)}"`)),
			expected: 'rows of samples',
			message: `${capital(ex.places.samples(inside))} ${ex.places.across ? 'at the right of' : 'below'} the data (${someOf(
				leads.filter(Boolean).map((t) => `"${t.slice(0, 40)}"`),
				3
			)}) ${inside.length === 1 ? 'is' : 'are'} shown and not used.`
		});
	}
	const errors = inside.flatMap((r) =>
		ex.view
			.cellsOfRow(r)
			.filter((c) => hasFlag(c, CELL.error))
			.map((c) => ex.at(r, c[0]))
	);
	if (errors.length > 0)
		ex.note({
			rule: 'B25',
			cells: errors,
			key: 'outside',
			found: `error values outside the data in ${someOf(errors)}`,
			expected: 'no error values',
			message: `${someOf(errors)} ${errors.length === 1 ? 'holds' : 'hold'} an error value outside the data; it is ignored.`
		});
}

/** B27: means and spreads between the samples. */
export function noteWithin(ex: Examination, rows: number[]): void {
	const own = rows.filter((r) => ex.mapping.leftOutRows.includes(r));
	if (own.length === 0) return;
	const leads = [
		...new Set(
			own.map(
				(r) =>
					ex.view
						.cellsOfRow(r)
						.map((c) => ex.shown(r, c[0]))
						.find(Boolean) ?? ''
			)
		)
	];
	ex.note({
		rule: 'B27',
		cells: own.map((r) => ex.at(r, ex.mapping.block.firstColumn)),
		key: 'within',
		found: someOf(leads.map((t) => `"${t.slice(0, 40)}"`)),
		expected: 'samples',
		message: `${capital(ex.places.samples(own))} between the samples (${someOf(leads.map((t) => `"${t.slice(0, 40)}"`))}) ${own.length === 1 ? 'is' : 'are'} shown and not used.`
	});
}

/** B31 and B37. */
export function noteMergesAndDates(ex: Examination, rows: number[], timeColumn: number): void {
	const inRows = new Set(rows);
	const filled = ex.view.sheet.merges.filter(
		(m) => m[1] <= timeColumn && m[3] >= timeColumn && m[2] > m[0] && inRows.has(m[0])
	);
	if (filled.length > 0)
		ex.note({
			rule: 'B31',
			cells: filled.map((m) => ex.at(m[0], m[1])),
			key: 'merged',
			found: `${plural(filled.length, 'merged time cell')}`,
			expected: 'a time for each sample',
			message: `${plural(filled.length, 'time cell')} merged over several ${ex.places.line}s (${someOf(filled.map((m) => ex.places.range({ firstRow: m[0], firstColumn: m[1], lastRow: m[2], lastColumn: m[3] })))}): the time holds for each of them.`
		});
	if (ex.workbook.dateSystem === 1904)
		ex.note({
			rule: 'B37',
			cells: [],
			key: '1904',
			found: 'date system 1904',
			expected: 'days counted from 1900, as most workbooks do',
			message: 'The workbook counts days from 1904. Dates and times were read accordingly.'
		});
}
