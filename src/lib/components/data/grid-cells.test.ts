import { describe, expect, it } from 'vitest';
import { SheetView } from '$lib/assay';
import type { ColumnMapping, GridWorkbook, Mapping } from '$lib/schemas/sheet';
import { CellLooks, type Look } from './grid-cells';

const workbook: GridWorkbook = {
	fileName: 'run.csv',
	kind: 'text',
	dateSystem: 1900,
	styles: [],
	sheets: [
		{
			name: 'run',
			state: 'visible',
			rows: [
				{ r: 1, c: [[1, 'time'], [2, 'A']] },
				{ r: 2, c: [[1, 0], [2, '<LOQ'], [3, 'note']] },
				{ r: 3, c: [[1, 1], [2, 401]] },
				{ r: 5, c: [[1, 'mean']] }
			],
			merges: [],
			hiddenRows: [],
			hiddenColumns: [],
			filter: null,
			lastRow: 5,
			lastColumn: 3
		}
	]
};
const series = (column: number, role: ColumnMapping['role']): ColumnMapping => ({ column, role, unit: null });
const mapping: Mapping = {
	table: 't1',
	sheet: 'run',
	block: { firstRow: 2, lastRow: 3, firstColumn: 1, lastColumn: 3 },
	headerRows: [1],
	layout: 'wide',
	columns: [series(1, 'time'), series(2, 'species'), series(3, 'ignore')],
	leftOutRows: [],
	decimal: '.'
};
const look: Look = {
	view: new SheetView(workbook, workbook.sheets[0]),
	mapping,
	block: mapping.block,
	lit: new Map([
		['B2', { level: 'ask', open: true, id: 'q' }],
		['A2', { level: 'ask', open: false, id: 'p' }]
	]),
	marked: new Set(['B2']),
	corrected: new Map([['B3', { sheet: 'run', cell: 'B3', original: '401', corrected: '410', reason: 'digits swapped', by: 'Mira' }]]),
	active: 'B2'
};
const classes = (over: Partial<Look>, row: number, column: number) =>
	new CellLooks({ ...look, ...over }).classes(row, column).split(' ');

describe('a cell of the sheet', () => {
	it('is lit by its finding, marked while that is looked at, and lit otherwise once it is answered', () => {
		expect(classes({}, 2, 2)).toEqual(['cell', 'right', 'ask', 'marked', 'active']);
		expect(classes({}, 2, 1)).toEqual(['cell', 'right', 'answered']);
	});
	it('stands back outside the block and in columns that are not used', () => {
		expect(classes({}, 5, 1)).toEqual(['cell', 'aside']);
		expect(classes({}, 2, 3)).toEqual(['cell', 'unused']);
		expect(classes({ block: { ...mapping.block, lastRow: 5 } }, 5, 1)).toEqual(['cell', 'right']);
	});
	it('reads as corrected, and says what the sheet holds', () => {
		const looks = new CellLooks(look);
		expect(looks.text(3, 2)).toBe('410');
		expect(looks.asReceived(3, 2)).toBe('On the sheet “401”, read as “410”: digits swapped (Mira)');
		expect(looks.asReceived(2, 2)).toBeUndefined();
	});
	it('belongs to the series of its row where times run across', () => {
		const rows = [1, 2].map((row) => ({ row, role: row === 1 ? ('time' as const) : ('species' as const), unit: null }));
		const across = { headerColumns: [1], leftOutColumns: [3], rows };
		const block = { firstRow: 1, lastRow: 2, firstColumn: 2, lastColumn: 3 };
		const turned: Mapping = { ...mapping, block, headerRows: [], columns: [], across };
		const looks = new CellLooks({ ...look, mapping: turned, block, lit: new Map(), marked: new Set(), active: null });
		expect(looks.ofRow(2)?.role).toBe('species');
		expect(looks.ofColumn(2)).toBeUndefined();
		expect(looks.classes(2, 2).split(' ')).toEqual(['cell', 'right']);
		expect(looks.classes(2, 3).split(' ')).toContain('aside');
	});
});
