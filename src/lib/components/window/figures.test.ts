import { describe, expect, it } from 'vitest';
import type { Figure } from '$lib/schemas/window';
import { axisTicks, intervalText, spanText, valueText } from './figures';

const figure = (value: number | null, interval: Figure['interval']): Figure => ({
	state: value === null ? 'never' : 'reached',
	value,
	interval,
	lower: null,
	upper: null,
	neverPercent: 0,
	firstOrder: null
});

describe('figures of a window', () => {
	it('round a time by the width of its interval', () => {
		expect(valueText(figure(2.134567, [2.09, 2.17]))).toBe('2.135');
		expect(intervalText(figure(2.134567, [2.0912, 2.1734]))).toBe('2.091 to 2.173');
	});
	it('say never instead of a number', () => {
		expect(valueText(figure(null, null))).toBe('never');
	});
	it('do not say never where something holds without end', () => {
		expect(valueText({ ...figure(null, [null, null]), state: 'no end' })).toBe('no end');
	});
	it('say open where an end is not determined', () => {
		expect(intervalText(figure(3, [null, 5]))).toMatch(/^open to/);
	});
	it('describe a span without an end', () => {
		expect(spanText({ from: 3.837, to: null }, 'h')).toBe('from 3.84 h on');
		expect(spanText({ from: 3.837, to: 4.64 }, 'h')).toBe('3.84 to 4.64 h');
	});
	it('mark an axis at round numbers and not beyond its end', () => {
		expect(axisTicks(10)).toEqual([0, 2, 4, 6, 8, 10]);
		expect(axisTicks(0.93).at(-1)).toBeLessThanOrEqual(0.93);
	});
});
