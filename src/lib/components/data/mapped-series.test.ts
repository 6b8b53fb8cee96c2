import { describe, expect, it } from 'vitest';
import type { ColumnMapping, Mapping } from '$lib/schemas/sheet';
import { seriesMark, seriesOf, withAddedSeries, withBlock, withSeries } from './mapped-series';

const series = (column: number, role: ColumnMapping['role']): ColumnMapping => ({ column, role, unit: null });
const down: Mapping = {
	table: 't1',
	sheet: 'run',
	block: { firstRow: 6, lastRow: 20, firstColumn: 1, lastColumn: 3 },
	headerRows: [4, 5],
	layout: 'wide',
	columns: [series(1, 'time'), series(2, 'species'), series(3, 'ignore')],
	leftOutRows: [],
	decimal: '.'
};
/** The same table turned over its diagonal. */
const across: Mapping = {
	...down,
	block: { firstRow: 1, lastRow: 3, firstColumn: 6, lastColumn: 20 },
	headerRows: [],
	columns: [],
	across: {
		headerColumns: [4, 5],
		leftOutColumns: [],
		rows: down.columns.map(({ column, ...rest }) => ({ row: column, ...rest }))
	}
};

describe('the series of a table, columns or rows', () => {
	it('are the columns of a plain table and the rows of one whose times run across', () => {
		expect(seriesOf(across)).toEqual(seriesOf(down));
		expect([seriesMark(down, 2), seriesMark(across, 2)]).toEqual(['B', 'row 2']);
	});

	it('are read otherwise one at a time, in either direction', () => {
		expect(withSeries(down, 3, { role: 'species' }).columns[2].role).toBe('species');
		const turned = withSeries(across, 3, { role: 'species', unit: 'mol/L' });
		expect(turned.across?.rows.map((r) => [r.row, r.role])).toEqual([
			[1, 'time'],
			[2, 'species'],
			[3, 'species']
		]);
		expect(turned.columns).toEqual([]);
	});

	it('that lie in a moved block stay; headers that it covers become data', () => {
		const next = withBlock(down, { firstRow: 5, lastRow: 20, firstColumn: 1, lastColumn: 2 });
		expect(next.headerRows).toEqual([4]);
		expect(next.columns.map((c) => c.column)).toEqual([1, 2]);
		const turned = withBlock(across, { firstRow: 1, lastRow: 2, firstColumn: 5, lastColumn: 20 });
		expect(turned.across?.headerColumns).toEqual([4]);
		expect(turned.across?.rows.map((r) => r.row)).toEqual([1, 2]);
		expect(turned.block).toEqual({ firstRow: 1, lastRow: 2, firstColumn: 5, lastColumn: 20 });
	});

	it('that a wider block adds are taken as proposed, in their order, and never replace what a person decided', () => {
		const narrow = withBlock(down, { ...down.block, firstColumn: 2, lastColumn: 3 });
		const decided = withSeries(narrow, 2, { unit: 'g/L' });
		const wide = withAddedSeries(decided, { ...down, columns: down.columns.map((c) => ({ ...c, unit: 'h' })) });
		expect(wide.columns.map((c) => [c.column, c.unit])).toEqual([
			[1, 'h'],
			[2, 'g/L'],
			[3, null]
		]);
		expect(withAddedSeries(down, down)).toBe(down);
		expect(withAddedSeries(down, across)).toBe(down);
	});
});
