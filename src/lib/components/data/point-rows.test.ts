import { describe, expect, it } from 'vitest';
import { MOST_WHOLE, rowAnchor, rowOfHash, rowWindow } from './point-rows';

const source = (row: number, column?: number) => ({ source: { sheet: 'run', row, ...(column ? { column } : {}) } });
const rows = [source(6), source(7), source(9)];

describe('the address of a row of a run', () => {
	it('is its row in the sheet, and comes back to the same point', () => {
		expect(rowAnchor(rows[2], 2)).toBe('row-9');
		expect(rowOfHash('#row-9', rows)).toBe(2);
	});
	it('is its column where times run across, and its place where no sheet is behind it', () => {
		expect([rowAnchor(source(3, 4), 0), rowOfHash('#row-5', [source(3, 4), source(3, 5)])]).toEqual(['row-4', 1]);
		expect([rowAnchor({}, 13), rowOfHash('#row-2', [{}, {}])]).toEqual(['row-14', 1]);
	});
	it('that is none of the run means nothing', () => {
		for (const hash of ['', '#row-0', '#row-8', '#row-x', '#points', '#row-99999999'])
			expect(rowOfHash(hash, rows)).toBeNull();
	});
});

describe('the rows that are drawn', () => {
	it('are all of a run of ordinary length', () => {
		expect(rowWindow(MOST_WHOLE, 9_000, 640, 32)).toEqual({ from: 0, to: MOST_WHOLE });
	});
	it('are those in sight of a long one, up to its very end', () => {
		expect(rowWindow(20_000, 0, 640, 32)).toEqual({ from: 0, to: 32 });
		const end = rowWindow(20_000, 20_000 * 32 - 640, 640, 32);
		expect(end.to).toBe(20_000);
		expect(end.from).toBeLessThan(19_980);
		expect(rowWindow(20_000, 99_999_999, 640, 32).to).toBe(20_000);
	});
});
