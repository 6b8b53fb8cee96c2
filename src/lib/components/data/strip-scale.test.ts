import { describe, expect, it } from 'vitest';
import { niceScale } from './strip-scale';

describe('the scale of a strip', () => {
	it('has round limits around the values', () => {
		expect(niceScale([49.9, 57.3], 2)).toEqual({ min: 48, max: 58, ticks: [48, 50, 52, 54, 56, 58] });
	});
	it('does not blow up scatter: equal values get room', () => {
		const { min, max } = niceScale([50, 50], 4);
		expect(max - min).toBeGreaterThanOrEqual(4);
		expect(min).toBeLessThan(50);
		expect(max).toBeGreaterThan(50);
	});
	it('holds up without any value', () => {
		expect(niceScale([], 1).ticks.length).toBeGreaterThan(1);
	});
});
