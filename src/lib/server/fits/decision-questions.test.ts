import { describe, expect, it } from 'vitest';
import { fitRequest } from '$lib/schemas/fit';
import { intermediates, usualQuestions } from './decision-questions';

const rate = { kRef: { value: 1, unit: '1/h' } };
const request = fitRequest.parse({
	species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
	steps: [
		{ id: 's1', reactant: 'A', products: [{ species: 'B' }], forward: rate, reverse: null },
		{ id: 's2', reactant: 'B', products: [{ species: 'C' }], forward: rate, reverse: rate }
	],
	referenceTemperature: { value: 50, unit: 'degC' },
	runs: [
		{
			temperature: { value: 50, unit: 'degC' },
			initial: { A: { value: 0.5, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
			timepoints: [1, 24].map((time) => ({ time, values: { A: 0.2 } }))
		}
	]
});
const limit = { species: 'C', relation: 'NMT' as const, limit: 3, unit: '% of charge' as const };

describe('what is asked of a fit by default', () => {
	it('is what the study decides by, then the maxima of what is formed and used up, then the end', () => {
		const strange = { ...limit, species: 'X' };
		expect(usualQuestions(request, 0, [limit, strange])).toEqual([
			{ kind: 'criterion', criterion: limit },
			{ kind: 'maximum', species: 'B' },
			{ kind: 'maximum', species: 'C' },
			{ kind: 'composition', time: 24 }
		]);
	});

	it('without a criterion is the conversion of what was charged', () => {
		expect(usualQuestions(request, 0, []).slice(0, 2)).toEqual([
			{ kind: 'conversion', species: 'A', conversion: 0.95 },
			{ kind: 'conversion', species: 'A', conversion: 0.99 }
		]);
	});

	it('counts a product of a reversible step as one that is used up, a starting material as none', () => {
		expect(intermediates(request)).toEqual(['B', 'C']);
	});
});
