import { describe, expect, it } from 'vitest';
import { alignedText, mostDecimals, sourceWords } from './quantities';

describe('values of one column', () => {
	it('stand with their decimal signs under each other, limits and whole numbers too', () => {
		const values = [0.5, 0.401, 12, { below: 0.02 }, null];
		const most = mostDecimals(values);
		expect(most).toBe(3);
		expect(alignedText(0.401, most)).toBe('0.401');
		expect(alignedText(0.5, most)).toBe('0.5\u2007\u2007');
		expect(alignedText({ below: 0.02 }, most)).toBe('< 0.02\u2007');
		expect(alignedText(12, most)).toBe('12\u2008\u2007\u2007\u2007');
	});
	it('are not moved where none has decimals', () => {
		expect(alignedText(12, mostDecimals([1, 12]))).toBe('12');
	});
});

describe('where a point came from', () => {
	it('is a row, or a column of a sheet whose times run across', () => {
		expect(sourceWords({ row: 9 })).toBe('row 9');
		expect(sourceWords({ row: 3, column: 4 })).toBe('column D');
	});
});
