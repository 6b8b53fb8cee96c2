import { describe, expect, it } from 'vitest';
import { dateTime, duration, readNumber, roundToError, significant } from './numbers';

describe('numbers as people type them', () => {
	it('reads points, exponents and a true minus sign', () => {
		expect(readNumber(' 0.794 ').value).toBe(0.794);
		expect(readNumber('5.93e-5').value).toBe(5.93e-5);
		expect(readNumber('5.93×10^-5').value).toBe(5.93e-5);
		expect(readNumber('−3').value).toBe(-3);
	});
	it('refuses a comma rather than guess what it means', () => {
		const read = readNumber('1,234');
		expect(read.value).toBeNull();
		expect(read.problem).toContain('point');
	});
	it('names what is not a number, and leaves an empty field empty', () => {
		expect(readNumber('abc').problem).toContain('abc');
		expect(readNumber('')).toEqual({ value: null, problem: null });
		expect(readNumber('1e999').value).toBeNull();
	});
});

describe('numbers as shown', () => {
	it('rounds to the second significant digit of the standard error', () => {
		expect(roundToError(0.793612, 0.00664)).toBe('0.7936');
		expect(roundToError(0.0952341, 0.00301)).toBe('0.0952');
		expect(roundToError(27.4123, 0.21)).toBe('27.41');
		expect(roundToError(76312, 412)).toBe('76310');
		expect(roundToError(0.7936, 0.0996)).toBe('0.79');
	});
	it('keeps the digits of very small constants by the same rule', () => {
		expect(roundToError(5.9259e-5, 1.2e-6)).toBe('5.93×10⁻⁵');
	});
	it('falls back to three significant digits without a standard error', () => {
		expect(roundToError(0.29731)).toBe('0.297');
		expect(roundToError(0.29731, 0)).toBe('0.297');
		expect(significant(0.5)).toBe('0.500');
		expect(significant(9.999)).toBe('10.0');
		expect(significant(1234567)).toBe('1.23×10⁶');
		expect(significant(0)).toBe('0');
		expect(significant(Number.NaN)).toBe('not known');
	});
	it('never shows minus zero', () => {
		expect(roundToError(-0.00001, 0.01)).toBe('0.000');
		expect(roundToError(-0.5, 0.01)).toBe('−0.500');
	});
	it('says a duration in the unit that a person would choose', () => {
		expect(duration(3142.8)).toBe('52 min');
		expect(duration(6364)).toBe('1.77 h');
		expect(duration(30)).toBe('30 s');
		expect(duration(400)).toBe('6.67 min');
		expect(duration(3 * 86400)).toBe('3.00 d');
		expect(duration(Infinity)).toBe('without end');
	});
	it('writes dates with the month as a word, in the site’s zone', () => {
		expect(dateTime('2026-12-01T13:02:00Z', 'Europe/Vienna')).toBe('01 Dec 2026 14:02');
		expect(dateTime('2026-09-30T23:30:00Z', 'Europe/Vienna')).toBe('01 Oct 2026 01:30');
	});
});
