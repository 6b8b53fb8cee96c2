import { describe, expect, it } from 'vitest';
import { HEAD_PX, NUMBER_PX, ROW_PX, type GridLayout } from './grid-layout';
import { nextCell, scrollTo } from './grid-moves';

const rows = Array.from({ length: 20_000 }, (_, i) => (i < 10 ? i + 1 : i + 3));
const layout: GridLayout = {
	rows,
	columns: [1, 2, 5],
	widths: [60, 60, 60],
	lefts: [46, 106, 166, 226],
	height: rows.length * ROW_PX
};

describe('the keyboard on the sheet', () => {
	it('begins at the first cell and goes from drawn row to drawn row, over blank ones', () => {
		expect(nextCell(layout, null, 'ArrowDown')).toBe('A1');
		expect(nextCell(layout, 'A10', 'ArrowDown')).toBe('A13');
		expect(nextCell(layout, 'B13', 'ArrowRight')).toBe('E13');
		expect(nextCell(layout, 'E13', 'ArrowRight')).toBe('E13');
	});
	it('goes to the ends of a row by Home and End, of the sheet with Ctrl', () => {
		expect(nextCell(layout, 'B13', 'End')).toBe('E13');
		expect(nextCell(layout, 'B13', 'Home')).toBe('A13');
		expect(nextCell(layout, 'B13', 'End', true)).toBe('B20002');
		expect(nextCell(layout, 'B13', 'Home', true)).toBe('B1');
	});
	it('leaves other keys and combinations to the browser', () => {
		expect(nextCell(layout, 'A1', 'a')).toBeNull();
		expect(nextCell(layout, 'A1', 'ArrowDown', true)).toBeNull();
		expect(nextCell({ ...layout, rows: [] }, null, 'ArrowDown')).toBeNull();
	});
});

describe('the sheet scrolls to a cell', () => {
	const box = { scrollTop: 0, scrollLeft: 0, width: 150, height: 400 };
	it('not at all where it is in sight', () => {
		expect(scrollTo(layout, 'A5', box)).toEqual({ top: 0, left: 0 });
	});
	it('so that a cell far below stands in the upper third, and a column at the right is whole', () => {
		const { top, left } = scrollTo(layout, 'E20002', box);
		const y = 19_999 * ROW_PX;
		expect(top).toBeLessThan(y);
		expect(top + 400 - HEAD_PX - ROW_PX).toBeGreaterThan(y);
		expect(left).toBe(226 - 150);
	});
	it('back to a column under the row numbers', () => {
		expect(scrollTo(layout, 'A5', { ...box, scrollLeft: 80 }).left).toBe(46 - NUMBER_PX);
	});
});
