import { describe, expect, it } from 'vitest';
import type { Maximum } from '$lib/kinetics/fit/maximum';
import { maximumSentence } from './decisions';

const m: Maximum = {
	run: 'r1',
	species: 'B',
	time: 2.1312,
	timeUnit: 'h',
	timeError: 0.0191,
	timeInterval: [2.0922, 2.1702],
	value: 0.28571,
	unit: 'mol/L',
	valueError: 0.0012,
	valueInterval: [0.2833, 0.2882]
};

describe('the sentence on a maximum', () => {
	it('cuts numbers at the second digit of their error and gives the interval', () => {
		expect(maximumSentence(m)).toBe('B is at its most, 0.2857 mol/L, at 2.131 h (2.092 to 2.170).');
		expect(maximumSentence(m, 'Run 2')).toMatch(/\) in Run 2\.$/);
	});
	it('goes without an interval where there is none', () => {
		expect(maximumSentence({ ...m, timeError: null, timeInterval: null, valueError: null })).toBe(
			'B is at its most, 0.286 mol/L, at 2.13 h.'
		);
	});
});
