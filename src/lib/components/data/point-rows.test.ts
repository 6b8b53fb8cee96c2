import { describe, expect, it } from 'vitest';
import { MOST_WHOLE, rowAnchor, rowOfHash, rowWindow } from './point-rows';

describe('the address of a row of a run', () => {
	it('counts the rows from one, and comes back to the same row', () => {
		expect(rowAnchor(13)).toBe('row-14');
		expect(rowOfHash('#row-14', 14)).toBe(13);
	});
	it('that is none of the run means nothing', () => {
		for (const hash of ['', '#row-0', '#row-15', '#row-x', '#points', '#row-99999999'])
			expect(rowOfHash(hash, 14)).toBeNull();
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
