import { describe, expect, it } from 'vitest';
import { blockWords, keyedEdge, moved, withEdge } from './block-edges';
import type { GridLayout } from './grid-layout';

const block = { firstRow: 6, lastRow: 20, firstColumn: 1, lastColumn: 8 };
const rows = [1, 2, 4, 5, ...Array.from({ length: 15 }, (_, i) => 6 + i), 22, 24];
const layout: GridLayout = { rows, columns: [1, 2, 3, 5, 8, 9], widths: [], lefts: [], height: 0 };

describe('the edges of the block of data', () => {
	it('move to the row or column that they are dragged to', () => {
		expect(withEdge(block, 'bottom', 17, 0).lastRow).toBe(17);
		expect(withEdge(block, 'left', 0, 3).firstColumn).toBe(3);
	});
	it('never pass each other: two rows and two columns stay', () => {
		expect(withEdge(block, 'top', 40, 0).firstRow).toBe(19);
		expect(withEdge(block, 'bottom', 1, 0).lastRow).toBe(7);
		expect(withEdge(block, 'right', 0, 1).lastColumn).toBe(2);
	});
	it('go by the keyboard from one row that is drawn to the next; blank rows are passed over', () => {
		expect(keyedEdge(block, 'bottom', 'ArrowDown', layout)?.lastRow).toBe(22);
		expect(keyedEdge(block, 'top', 'ArrowUp', layout)?.firstRow).toBe(5);
		expect(keyedEdge(block, 'top', 'ArrowDown', layout, true)?.firstRow).toBe(16);
		expect(keyedEdge(block, 'right', 'ArrowLeft', layout)?.lastColumn).toBe(5);
	});
	it('leave keys alone that mean nothing to them', () => {
		expect(keyedEdge(block, 'top', 'ArrowLeft', layout)).toBeNull();
		expect(keyedEdge(block, 'left', 'Enter', layout)).toBeNull();
	});
	it('move together, and not off the sheet', () => {
		expect(moved(block, 2, 1, layout)).toEqual({ firstRow: 8, lastRow: 22, firstColumn: 2, lastColumn: 9 });
		expect(moved(block, -50, -5, layout)).toMatchObject({ firstRow: 1, lastRow: 15, firstColumn: 1 });
	});
	it('are said in words', () => {
		expect(blockWords(block)).toBe('rows 6 to 20, columns A to H');
	});
});
