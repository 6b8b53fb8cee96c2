/** What is noted of headers: joined ones (B2), columns of scatter (B27), columns without a name (B32, B6). */
import type { ColumnHeader } from './columns';
import type { Examination } from './examination';
import { capital, someOf } from './wording';
import { isSpreadHeader } from './words';

/** B2: headers in several rows were joined. */
export function noteHeaders(ex: Examination, joined: { column: number; header: string }[]): void {
	const { headerRows } = ex.mapping;
	const where = ex.places.samples(headerRows);
	if (headerRows.length < 2 || joined.length === 0) return;
	ex.note({
		rule: 'B2',
		cells: joined.map((h) => ex.at(headerRows[0], h.column)),
		key: where,
		found: `header in ${where}`,
		expected: 'one header row, or several that say more together',
		message: `The header spans ${where}; its parts were joined, for example "${joined[0].header}".`
	});
}

/** Columns that hold the scatter of values: shown, and no weight of anything. */
export function noteSpreads(ex: Examination, headers: Map<number, ColumnHeader>): void {
	const own = ex.mapping.columns.filter((c) => {
		const header = headers.get(c.column);
		return (
			c.role === 'ignore' && header !== undefined && isSpreadHeader(header.parts.at(-1) ?? header.header)
		);
	});
	if (own.length === 0) return;
	const where = capital(ex.places.manySeries(own.map((c) => c.column)));
	ex.note({
		rule: 'B27',
		cells: own.map((c) => ex.at(ex.mapping.headerRows.at(-1) ?? ex.mapping.block.firstRow, c.column)),
		key: 'spreads',
		found: someOf(own.map((c) => `"${headers.get(c.column)?.header ?? ''}"`)),
		expected: 'values',
		message: `${where} ${own.length === 1 ? 'holds' : 'hold'} the scatter of values; shown, and not used as weights.`
	});
}

/** Columns of numbers that no header names: shown, never used without a word. In a text parted by commas they may be decimals. */
export function noteUnnamed(ex: Examination, headers: Map<number, ColumnHeader>, rows: number[]): void {
	if (ex.mapping.headerRows.length === 0) return;
	askShifted(ex, headers, rows);
	const numeric = (column: number) => rows.filter((r) => ex.value(r, column).kind === 'number').length;
	const own = ex.mapping.columns.filter(
		(c) => c.role === 'ignore' && headers.get(c.column)?.header === '' && numeric(c.column) > rows.length / 2
	);
	if (own.length === 0) return;
	const where = capital(ex.places.manySeries(own.map((c) => c.column)));
	const cells = own.map((c) => ex.at(ex.mapping.block.firstRow, c.column));
	const whole = (c: number) => rows.every((r) => /^\d*$/.test(ex.shown(r, c)));
	if (ex.workbook.delimiter === ',' && ex.mapping.columns.every((c) => whole(c.column)))
		ex.ask({
			rule: 'B6',
			level: 'stop',
			cells,
			key: 'comma-columns',
			found: `${ex.mapping.columns.length} columns of whole numbers below ${ex.mapping.columns.length - own.length} names, parted by commas`,
			expected: 'decimal commas in a file whose columns are parted by semicolons or tabs',
			message: `The rows have more columns than the header: commas seem to part both columns and decimals, so the numbers cannot be told. Save the file with semicolons, or as .xlsx, and upload that.`
		});
	else
		ex.note({
			rule: 'B32',
			cells,
			key: 'unnamed',
			found: `${where} without a header`,
			expected: 'a name above each column',
			message: `${where} ${own.length === 1 ? 'holds' : 'hold'} numbers and ${own.length === 1 ? 'has' : 'have'} no header; shown and not used. Say what ${own.length === 1 ? 'it is' : 'they are'} if ${own.length === 1 ? 'it belongs' : 'they belong'} to the data.`
		});
}

/** B6: in a text parted by commas, a row with more cells than there are names may hold a decimal comma, and all that follows is shifted. */
function askShifted(ex: Examination, headers: Map<number, ColumnHeader>, rows: number[]): void {
	if (ex.workbook.delimiter !== ',') return;
	const last = ex.mapping.columns.reduce(
		(most, c) => (headers.get(c.column)?.header ? Math.max(most, c.column) : most),
		0
	);
	const beyond = ex.mapping.columns
		.filter((c) => c.role === 'ignore' && c.column > last)
		.map((c) => c.column);
	const longer = rows.filter((r) => beyond.some((c) => ex.shown(r, c) !== ''));
	// Where most rows are longer the column is there for all of them.
	if (last === 0 || longer.length === 0 || longer.length * 2 > rows.length) return;
	const where = ex.places.samples(longer);
	ex.ask({
		rule: 'B6',
		level: 'ask',
		cells: longer.map((r) => ex.at(r, beyond[0])),
		key: 'shifted',
		found: `${where} with more cells than names`,
		expected: 'as many cells as names',
		message: `${capital(where)} ${longer.length === 1 ? 'has' : 'have'} more cells than there are names: a decimal comma there would shift all that follows. Correct the file and upload it again, or do the cells stand where they belong?`,
		options: [{ key: 'keep', label: 'They stand where they belong' }]
	});
}
