import { describe, expect, it } from 'vitest';
import type { GridWorkbook } from '$lib/schemas/sheet';
import { frameOf, layoutOf, ROW_PX, rowsInSight } from './grid-layout';

const workbook = (rows: GridWorkbook['sheets'][0]['rows']): GridWorkbook => ({
	fileName: 'x.csv',
	kind: 'text',
	dateSystem: 1900,
	styles: [{ format: 'General', kind: 'general' }],
	sheets: [
		{
			name: 'x',
			state: 'visible',
			rows,
			merges: [],
			hiddenRows: [],
			hiddenColumns: [],
			filter: null,
			lastRow: rows.at(-1)?.r ?? 0,
			lastColumn: 3
		}
	]
});

const some = workbook([
	{ r: 1, c: [[1, 'Title of the table, rather long as titles are']] },
	{ r: 2, c: [[1, '']] },
	...Array.from({ length: 200 }, (_, i) => ({ r: i + 4, c: [[1, i] as [number, number], [3, 0.5] as [number, number]] }))
]);

describe('the layout of a sheet', () => {
	const layout = layoutOf(some, some.sheets[0]);
	it('leaves out blank rows and columns that nothing stands in', () => {
		expect(layout.rows.slice(0, 3)).toEqual([1, 4, 5]);
		expect(layout.columns).toEqual([1, 3]);
	});
	it('is not widened by one long note', () => {
		expect(layout.widths[0]).toBeLessThan(120);
	});
	it('draws the rows in sight and a few more, never beyond the ends', () => {
		expect(rowsInSight(layout, 0, 260)).toEqual([0, 16]);
		expect(rowsInSight(layout, 100 * ROW_PX, 260)).toEqual([94, 116]);
		expect(rowsInSight(layout, 1e6, 260)[1]).toBe(201);
	});
	it('frames the block by the rows that are drawn', () => {
		const frame = frameOf(layout, { firstRow: 4, lastRow: 13, firstColumn: 1, lastColumn: 3 })!;
		expect(frame.top).toBe(ROW_PX);
		expect(frame.height).toBe(10 * ROW_PX);
		expect(frame.width).toBe(layout.widths[0] + layout.widths[1]);
		expect(frameOf(layout, { firstRow: 900, lastRow: 901, firstColumn: 1, lastColumn: 3 })).toBeNull();
	});
});
