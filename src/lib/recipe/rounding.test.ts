import { describe, expect, it } from 'vitest';
import { duration, plain, roundDown, roundUp } from './rounding';

describe('rounding on the adverse side', () => {
	it('prints a hold of 37.8 h as 37 h', () => {
		expect(roundDown(37.8)).toBe(37);
		expect(roundDown(47.6)).toBe(47);
	});
	it('keeps a number that has two digits already, whatever binary arithmetic makes of it', () => {
		for (let tenths = 10; tenths <= 99; tenths++) {
			expect(roundDown(tenths / 10)).toBe(tenths / 10);
			expect(roundUp(tenths / 10)).toBe(tenths / 10);
		}
	});
	it('never gives more than the value when it rounds down, nor less when it rounds up', () => {
		for (let i = 1; i < 4000; i++) {
			const value = i * 0.0137 * 1.07 ** (i % 40);
			expect(roundDown(value)).toBeLessThanOrEqual(value * (1 + 2e-9));
			expect(roundDown(value)).toBeGreaterThan(value * 0.9);
			expect(roundUp(value)).toBeGreaterThanOrEqual(value * (1 - 2e-9));
		}
	});
	it('rounds an earliest time up', () => {
		expect(roundUp(3.06)).toBe(3.1);
		expect(roundUp(3.84)).toBe(3.9);
		expect(roundUp(128)).toBe(130);
	});
	it('refuses what is no finite number', () => {
		expect(() => roundDown(Infinity)).toThrow(RangeError);
		expect(roundDown(0)).toBe(0);
	});
	it('prints numbers and durations without exponents in plain reach', () => {
		expect(plain(0.000794)).toBe('0.000794');
		expect(plain(1234.6)).toBe('1235');
		expect(duration(15)).toBe('15 min');
		expect(duration(183.6)).toBe('3.06 h');
	});
});
