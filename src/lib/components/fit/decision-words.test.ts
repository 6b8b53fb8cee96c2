import { describe, expect, it } from 'vitest';
import type { DecisionQuantity } from '$lib/kinetics/fit';
import type { AnsweredDecision } from '$lib/schemas/fit-analysis';
import { decisionSentences, quantityWords, rangeWords, shownInterval } from './decision-words';

const time: DecisionQuantity = {
	run: 'r1',
	species: 'B',
	quantity: 'time of maximum',
	value: 2.1312,
	unit: 'h',
	standardError: 0.0191,
	interval: [2.0922, 2.1702],
	profileInterval: null,
	beyondSamples: false
};
const value: DecisionQuantity = {
	...time,
	quantity: 'value at maximum',
	value: 0.28571,
	unit: 'mol/L',
	standardError: 0.0012,
	interval: [0.2833, 0.2882]
};
const maximum: AnsweredDecision = {
	question: { kind: 'maximum', species: 'B' },
	quantities: [time, value],
	none: null
};
const limit: AnsweredDecision = {
	question: {
		kind: 'criterion',
		criterion: { species: 'C', relation: 'NMT', limit: 3, unit: '% of charge' }
	},
	quantities: [
		{
			...time,
			species: 'C',
			quantity: 'time criterion holds until',
			value: 4.04,
			standardError: 0.05,
			profileInterval: [3.92, null]
		}
	],
	none: null
};

describe('the sentences at the top of a result', () => {
	it('cut numbers at the second digit of their error and give the interval', () => {
		expect(decisionSentences([maximum], 'h')).toEqual([
			'B is at its most, 0.2857 mol/L, at 2.131 h (2.092 to 2.170).'
		]);
		expect(decisionSentences([maximum], 'h', 'Run 2, 50 °C')[0]).toMatch(/\) in Run 2, 50 °C\.$/);
	});

	it('say what the study decides by, and leave out what has no answer', () => {
		const none = { ...limit, quantities: [], none: 'not met' };
		expect(decisionSentences([none, limit], 'h')).toEqual([
			'C NMT 3 % of charge holds until 4.040 h (3.920 to open).'
		]);
	});

	it('say on which response factors a limit in area % rests, as the row of the table does', () => {
		const question = {
			kind: 'criterion' as const,
			criterion: { species: 'C', relation: 'NMT' as const, limit: 2, unit: 'area %' as const }
		};
		const note = 'response factor 1 for every species';
		const quantities = [{ ...limit.quantities[0], note }];
		expect(decisionSentences([{ question, quantities, none: null }], 'h')).toEqual([
			'C NMT 2 area % (response factor 1 for every species) holds until 4.040 h (3.920 to open).'
		]);
		expect(quantityWords(question, quantities[0], 'h')).toContain(`(${note}): holds until`);
	});

	it('go without an interval where there is none', () => {
		const bare = { ...time, standardError: null, interval: null };
		const answer = { ...maximum, quantities: [bare, { ...value, standardError: null, interval: null }] };
		expect(decisionSentences([answer], 'h')).toEqual(['B is at its most, 0.286 mol/L, at 2.13 h.']);
	});
});

describe('a row of the table', () => {
	it('names its quantity and says how its interval was got', () => {
		expect(quantityWords(limit.question, limit.quantities[0], 'h')).toBe('C NMT 3 % of charge: holds until');
		expect(shownInterval(limit.quantities[0]).how).toBe('profile likelihood');
		expect(shownInterval(time).how).toBe('linear (delta method)');
		expect(shownInterval({ ...time, interval: null }).how).toMatch(/not determined/);
	});

	it('gives no limit below zero', () => {
		expect(rangeWords({ ...value, value: 0.0004, standardError: 0.0012, interval: [-0.002, 0.0028] })).toBe(
			'0 to 0.0028'
		);
	});
});
