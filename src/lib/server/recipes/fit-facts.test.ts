import { describe, expect, it } from 'vitest';
import { fitRequest, type FitReport } from '$lib/schemas/fit';
import { ratesOf } from './fit-facts';

const request = fitRequest.parse({
	species: [{ id: 'A' }, { id: 'B' }],
	steps: [
		{ id: 's1', reactant: 'A', products: [{ species: 'B' }], forward: { kRef: { value: 1, unit: '1/min' } } }
	],
	referenceTemperature: { value: 333.15, unit: 'K' },
	runs: [
		{
			temperature: { value: 60, unit: 'degC' },
			initial: { A: { value: 1, unit: 'mol/L' } },
			timeUnit: 'min',
			channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
			timepoints: []
		}
	]
});
const rate = (profileCi95: [number | null, number | null] | null) =>
	ratesOf(request, {
		parameters: [
			{
				id: 's1.forward.kRef',
				estimate: 0.02,
				standardError: 0.002,
				ci95: [0.016, 0.024],
				profileCi95,
				unit: '1/min',
				state: 'fitted'
			}
		]
	} as unknown as FitReport)[0];

describe('the rate constants that cautions start from', () => {
	it('are in 1/h with the reference temperature in °C', () => {
		expect(rate(null).perH).toBeCloseTo(1.2, 12);
		expect(rate(null).referenceC).toBeCloseTo(60, 12);
	});
	it('take the lower limit of the profile, zero where it stays open, and the symmetric one only without a profile', () => {
		expect(rate([0.015, 0.026]).lowerPerH).toBeCloseTo(0.9, 12);
		expect(rate([null, 0.026]).lowerPerH).toBe(0);
		expect(rate(null).lowerPerH).toBeCloseTo(0.96, 12);
	});
});
