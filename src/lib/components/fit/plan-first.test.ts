import { describe, expect, it } from 'vitest';
import { planSamplesFor } from '$lib/kinetics/fit';
import { samplePlanRequest } from '$lib/schemas/fit-plan';
import { schemeContent } from '$lib/schemas/scheme';
import {
	excessOf,
	firstPlanRequest,
	guessesOf,
	likelyCharged,
	usualLatest,
	type FirstConditions
} from './plan-first';

const rate = (value: number) => ({ kRef: { value, unit: '1/h' } });
const chain = schemeContent.parse({
	species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
	steps: [
		{ id: 's1', reactant: 'A', products: [{ species: 'B' }], forward: rate(0.5), reverse: null },
		{ id: 's2', reactant: 'B', products: [{ species: 'C' }], forward: rate(0.2), reverse: null }
	],
	referenceTemperature: { value: 50, unit: 'degC' }
});
const conditions: FirstConditions = {
	temperature: { value: 50, unit: 'degC' },
	timeUnit: 'h',
	charge: { A: 1, B: null, C: null },
	excess: {},
	assayed: ['B'],
	a: 0.01,
	b: null,
	guesses: { 's1.forward.kRef': 0.7 },
	known: []
};
const limits = { samples: 2, earliest: 0, latest: 24, minimumGap: 0, windows: [] };

describe('a plan of samples before the first run', () => {
	it('asks what the engine understands, with typed guesses in place of the drawn ones', () => {
		const request = samplePlanRequest.parse(firstPlanRequest(chain, conditions, limits));
		expect(request.steps[0].forward.kRef.value).toBe(0.7);
		// Box & Lucas, Biometrika 46 (1959) 77: 1.23 and 6.86 for 0.7 and 0.2.
		const [first, second] = planSamplesFor(request).times;
		expect(first).toBeCloseTo(1.23, 2);
		expect(second).toBeCloseTo(6.86, 2);
	});

	it('says what is missing', () => {
		const missing = (change: Partial<FirstConditions>) =>
			firstPlanRequest(chain, { ...conditions, ...change }, limits);
		expect(missing({ a: null })).toMatch(/standard deviation/);
		expect(missing({ charge: { A: null } })).toMatch(/charge/);
		expect(missing({ assayed: [] })).toMatch(/assayed/);
	});

	it('asks for the concentration of what is held in excess', () => {
		const [first, ...rest] = chain.steps;
		const law = { ...first.forward, excess: [{ species: 'N', order: 1 }] };
		const scheme = { ...chain, steps: [{ ...first, forward: law }, ...rest] };
		expect(excessOf(scheme)).toEqual(['N']);
		expect(firstPlanRequest(scheme, conditions, limits)).toMatch(/concentration of N/);
	});

	it('begins from what the scheme says: constants, charge, and four half-lives of the slowest step', () => {
		expect(guessesOf(chain).map((g) => [g.id, g.guess.value])).toEqual([
			['s1.forward.kRef', 0.5],
			['s2.forward.kRef', 0.2]
		]);
		expect(likelyCharged(chain)).toEqual(['A']);
		expect(usualLatest(guessesOf(chain), 'h')).toBe(14);
		expect(usualLatest(guessesOf(chain), 'min')).toBe(830);
	});
});
