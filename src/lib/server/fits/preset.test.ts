import { describe, expect, it } from 'vitest';
import { fitRequest } from '$lib/schemas/fit';
import { settingsOf } from './preset';

const request = (options: object) =>
	fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B' }],
		steps: [
			{
				id: 's1',
				reactant: 'A',
				products: [{ species: 'B' }],
				forward: { kRef: { value: 1, unit: '1/h' } },
				reverse: { kRef: { value: 0.5, unit: '1/h' } }
			}
		],
		referenceTemperature: { value: 50, unit: 'degC' },
		runs: [
			{
				id: 'r1',
				temperature: { value: 50, unit: 'degC' },
				initial: { A: { fit: true, guess: { value: 0.5, unit: 'mol/L' } } },
				timeUnit: 'h',
				channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
				timepoints: [{ time: 1, values: { A: 0.2 } }]
			}
		],
		options
	});

describe('the choices behind a fit', () => {
	it('are ties, bounds and charges as they were asked for, and nothing that goes without saying', () => {
		const settings = settingsOf(
			request({
				tied: [{ parameter: 's1.reverse.kRef', to: 's1.forward.kRef', factor: 0.25 }],
				bounds: { 's1.forward.kRef': { upper: { value: 3, unit: '1/h' } } }
			})
		);
		expect(settings['s1.reverse.kRef']).toMatchObject({ state: 'tied', to: 's1.forward.kRef', factor: 0.25 });
		expect(settings['s1.forward.kRef']).toMatchObject({
			state: 'fitted',
			upper: { value: 3, unit: '1/h' }
		});
		expect(settings['r1.initial.A']).toEqual({ state: 'fitted', value: { value: 0.5, unit: 'mol/L' } });
		expect(Object.keys(settingsOf(request({})))).toEqual(['r1.initial.A']);
	});

	it('keep what was held fixed, with its value', () => {
		const { 's1.reverse.kRef': held } = settingsOf(request({ fixed: ['s1.reverse.kRef'] }));
		expect(held.state).toBe('fixed');
		expect(held.value!.value).toBeCloseTo(0.5, 12);
	});
});
