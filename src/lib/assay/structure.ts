/** Rules about the table as a whole: B1, B2, B6, B27, B29, B30, B31, B37 and errors outside the block (B25). */
import { CELL } from '$lib/schemas/sheet';
import type { FindingOption } from '$lib/schemas/sheet';
import { numberPart } from './cells';
import { figure, plural, someOf, type Examination } from './examination';
import { address, columnLetter, hasFlag, rangeText } from './grid';
import { decide, noVotes, vote, type DecimalVotes } from './numbers';

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
	timeByHeader: boolean;
	headers: boolean;
}

/** B1: only asked where the block could be meant otherwise. */
export function askBlock(ex: Examination, facts: BlockFacts): void {
	const { block } = ex.mapping;
	const doubts: string[] = [];
	if (facts.blank.length > 0)
		doubts.push(`${plural(facts.blank.length, 'blank row')} inside (${someOf(facts.blank.map(String))})`);
	if (facts.doubtfulRows.length > 0) doubts.push(`${rowsText(facts.doubtfulRows)} below left out`);
	if (!facts.headers) doubts.push('no header row above');
	else if (!facts.timeByHeader) doubts.push('no column whose header says time');
	if (doubts.length === 0) return;
	ex.ask({
		rule: 'B1',
		level: 'ask',
		cells: [address(block.firstRow, block.firstColumn), address(block.lastRow, block.lastColumn)],
		key: rangeText(block),
		found: `${rangeText(block)}: ${doubts.join(', ')}`,
		expected: 'the rows and columns that hold the data',
		message: `We read rows ${block.firstRow}–${block.lastRow} of "${ex.sheet}" as the data (${doubts.join('; ')}). Is that right?`,
		options: [{ key: 'right', label: 'Yes, these rows' }]
	});
}

const rowsText = (rows: number[]) =>
	rows.length > 1 && rows[rows.length - 1] - rows[0] === rows.length - 1
		? `rows ${rows[0]}–${rows[rows.length - 1]}`
		: `${rows.length === 1 ? 'row' : 'rows'} ${someOf(rows.map(String))}`;

/** B2: headers in several rows were joined. */
export function noteHeaders(ex: Examination, joined: { column: number; header: string }[]): void {
	const { headerRows } = ex.mapping;
	if (headerRows.length < 2 || joined.length === 0) return;
	ex.note({
		rule: 'B2',
		cells: joined.map((h) => address(headerRows[0], h.column)),
		key: rowsText(headerRows),
		found: `header in ${rowsText(headerRows)}`,
		message: `The header spans ${rowsText(headerRows)}; its parts were joined, for example "${joined[0].header}".`
	});
}

/** B6: one decimal convention for the whole file. */
export function settleDecimal(ex: Examination, votes: DecimalVotes): void {
	if (ex.decimal) return;
	const { decimal, trouble } = decide(votes);
	if (!trouble) {
		ex.decimal = decimal;
		ex.mapping.decimal = decimal;
		return;
	}
	const taken = trouble === 'ambiguous' ? askAmbiguous(ex, votes) : stopMixed(ex, votes);
	if (!taken) return;
	ex.decimal = taken;
	ex.mapping.decimal = taken;
	ex.conversions.push(`Numbers written as text: "${taken}" read as the decimal sign throughout the file.`);
}

function askAmbiguous(ex: Examination, votes: DecimalVotes): '.' | ',' | null {
	const first = votes.ambiguous[0];
	const taken = ex.ask({
		rule: 'B6',
		level: 'ask',
		cells: votes.ambiguous.map((a) => cellOf(a.where)),
		key: 'decimal',
		found: `"${first.text}" in ${cellOf(first.where)}`,
		expected: 'one decimal sign for the file',
		message: `"${first.text}" could be ${figure(first.point)} or ${figure(first.comma)}. Nothing else in the file tells which.`,
		options: [
			{ key: 'point', label: `"." is the decimal sign: ${figure(first.point)}` },
			{ key: 'comma', label: `"," is the decimal sign: ${figure(first.comma)}` }
		]
	});
	return taken ? (taken.key === 'comma' ? ',' : '.') : null;
}

function stopMixed(ex: Examination, votes: DecimalVotes): '.' | ',' | null {
	const options: FindingOption[] = [
		{
			key: 'point',
			label: `"." is the decimal sign; the ${votes.counts.comma} others are then asked one by one`
		},
		{
			key: 'comma',
			label: `"," is the decimal sign; the ${votes.counts.point} others are then asked one by one`
		}
	];
	const taken = ex.ask({
		rule: 'B6',
		level: 'stop',
		cells: [...votes.point, ...votes.comma].map(cellOf),
		key: 'decimal',
		found: `decimal points (${someOf(votes.point.map(cellOf))}) and decimal commas (${someOf(votes.comma.map(cellOf))})`,
		expected: 'one decimal sign for the file',
		message: `The file mixes decimal points (${someOf(votes.point.map(cellOf))}) and decimal commas (${someOf(votes.comma.map(cellOf))}). Say which one counts.`,
		options
	});
	return taken ? (taken.key === 'comma' ? ',' : '.') : null;
}

const cellOf = (where: string) => where.slice(where.lastIndexOf('!') + 1);

/** Votes of all text cells inside the blocks of a file. */
export function countVotes(
	workbook: Examination['workbook'],
	blocks: {
		sheet: string;
		block: { firstRow: number; lastRow: number; firstColumn: number; lastColumn: number };
	}[]
): DecimalVotes {
	const votes = noVotes();
	for (const { sheet, block } of blocks) {
		const found = workbook.sheets.find((s) => s.name === sheet);
		for (const row of found?.rows ?? []) {
			if (row.r < block.firstRow || row.r > block.lastRow) continue;
			for (const cell of row.c)
				if (
					typeof cell[1] === 'string' &&
					cell[0] >= block.firstColumn &&
					cell[0] <= block.lastColumn &&
					cell[1].length < 60
				)
					voteCell(votes, cell[1], sheet, row.r, cell[0]);
		}
	}
	return votes;
}

/** A text without a separator says nothing; most texts of a table are like that or plain. */
function voteCell(votes: DecimalVotes, text: string, sheet: string, row: number, column: number): void {
	if (!text.includes('.') && !text.includes(',')) return;
	vote(votes, numberPart(text), `${sheet}!${address(row, column)}`);
}

/** B29: hidden rows, columns and sheets, active filters. Rows that the person leaves out are returned. */
export function askHidden(ex: Examination, rows: number[]): Set<number> {
	const { view, mapping } = ex;
	if (view.sheet.state !== 'visible') askHiddenSheet(ex);
	const hidden = rows.filter((r) => view.rowHidden(r));
	const out = new Set<number>();
	if (hidden.length > 0) {
		const why = view.sheet.filter ? ` (a filter is on: ${view.sheet.filter})` : '';
		const taken = ex.ask({
			rule: 'B29',
			level: 'ask',
			cells: hidden.map((r) => address(r, mapping.block.firstColumn)),
			key: 'rows',
			found: `${rowsText(hidden)} hidden${why}`,
			expected: 'a choice; hidden rows are neither dropped nor used silently',
			message: `${hidden.length === 1 ? 'Row' : 'Rows'} ${someOf(hidden.map(String))} of "${ex.sheet}" ${hidden.length === 1 ? 'is' : 'are'} hidden${why}. Do they belong to the data?`,
			options: [
				{ key: 'include', label: 'Use them too' },
				{ key: 'leave-out', label: 'Leave them out' }
			]
		});
		if (taken?.key === 'leave-out') {
			hidden.forEach((r) => out.add(r));
			ex.conversions.push(`Hidden ${rowsText(hidden)} left out.`);
		}
	}
	askHiddenColumns(ex);
	return out;
}

function askHiddenSheet(ex: Examination): void {
	ex.ask({
		rule: 'B29',
		level: 'ask',
		cells: [address(ex.mapping.block.firstRow, ex.mapping.block.firstColumn)],
		key: 'sheet',
		found: `sheet "${ex.sheet}" is ${ex.view.sheet.state}`,
		expected: 'a choice; hidden sheets are not used silently',
		message: `Sheet "${ex.sheet}" is hidden in the file. Use this table all the same?`,
		options: [{ key: 'include', label: 'Use it' }]
	});
}

function askHiddenColumns(ex: Examination): void {
	const hidden = ex.mapping.columns.filter((c) => c.role !== 'ignore' && ex.view.columnHidden(c.column));
	if (hidden.length === 0) return;
	const letters = hidden.map((c) => columnLetter(c.column));
	const taken = ex.ask({
		rule: 'B29',
		level: 'ask',
		cells: hidden.map((c) => address(ex.mapping.block.firstRow, c.column)),
		key: 'columns',
		found: `${plural(hidden.length, 'hidden column')}: ${someOf(letters)}`,
		expected: 'a choice; hidden columns are neither dropped nor used silently',
		message: `${hidden.length === 1 ? 'Column' : 'Columns'} ${someOf(letters)} of "${ex.sheet}" ${hidden.length === 1 ? 'is' : 'are'} hidden. Do they belong to the data?`,
		options: [
			{ key: 'include', label: 'Use them too' },
			{ key: 'leave-out', label: 'Leave them out' }
		]
	});
	if (taken?.key !== 'leave-out') return;
	for (const c of hidden) c.role = 'ignore';
	ex.conversions.push(`Hidden columns ${letters.join(', ')} left out.`);
}

/** B30: colours and strike-through are seen, not interpreted. */
export function noteColours(ex: Examination, rows: number[]): void {
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
			if (style.coloured || style.struck) marked.push(address(r, cell[0]));
		}
	}
	// A whole block in one colour is decoration.
	if (marked.length === 0 || (struck === 0 && coloured > rows.length * used.size * 0.6)) return;
	const what = [coloured ? `${coloured} coloured` : '', struck ? `${struck} struck through` : '']
		.filter(Boolean)
		.join(', ');
	ex.note({
		rule: 'B30',
		cells: marked,
		key: 'colours',
		found: what,
		message: `${plural(marked.length, 'cell')} in the data ${marked.length === 1 ? 'is' : 'are'} marked (${what}): ${someOf(marked)}. Colours are not imported. Exclude any?`
	});
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
			cells: inside.map((r) => address(r, ex.mapping.block.firstColumn)),
			key: 'footers',
			found: someOf(leads.filter(Boolean).map((t) => `"${t.slice(0, 40)}"`)),
			message: `${rowsText(inside)} below the data (${someOf(
				leads.filter(Boolean).map((t) => `"${t.slice(0, 40)}"`),
				3
			)}) ${inside.length === 1 ? 'is' : 'are'} shown and not used.`.replace(/^r/, 'R')
		});
	}
	const errors = inside.flatMap((r) =>
		ex.view
			.cellsOfRow(r)
			.filter((c) => hasFlag(c, CELL.error))
			.map((c) => address(r, c[0]))
	);
	if (errors.length > 0)
		ex.note({
			rule: 'B25',
			cells: errors,
			key: 'outside',
			found: `error values outside the data in ${someOf(errors)}`,
			message: `${someOf(errors)} ${errors.length === 1 ? 'holds' : 'hold'} an error value outside the data; it is ignored.`
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
			cells: filled.map((m) => address(m[0], m[1])),
			key: 'merged',
			found: `${plural(filled.length, 'merged time cell')}`,
			message: `${plural(filled.length, 'time cell')} merged over several rows (${someOf(filled.map((m) => rangeText({ firstRow: m[0], firstColumn: m[1], lastRow: m[2], lastColumn: m[3] })))}): the time holds for each of the rows.`
		});
	if (ex.workbook.dateSystem === 1904)
		ex.note({
			rule: 'B37',
			cells: [],
			key: '1904',
			found: 'date system 1904',
			message: 'The workbook counts days from 1904. Dates and times were read accordingly.'
		});
}
