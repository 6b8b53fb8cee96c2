import { describe, expect, it } from 'vitest';
import { fitRequest } from '$lib/schemas/fit';
import { changesSince, type ComparableFit } from './changes';

const request = (options: object = {}, initial: object = { A: { value: 0.5, unit: 'mol/L' } }) =>
	fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B' }],
		steps: [
			{
				id: 's1',
				reactant: 'A',
				products: [{ species: 'B' }],
				forward: { kRef: { value: 1, unit: '1/h' } },
				reverse: { kRef: { value: 1, unit: '1/h' } }
			}
		],
		referenceTemperature: { value: 50, unit: 'degC' },
		runs: [
			{
				id: 'r1',
				temperature: { value: 50, unit: 'degC' },
				initial,
				timeUnit: 'h',
				channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
				timepoints: []
			}
		],
		options
	});

const fit = (over: Partial<ComparableFit> = {}): ComparableFit => ({
	scheme: { id: 'x', name: 'Reversible', number: 3 },
	runs: [{ id: 'a', number: 1, name: 'Run 1', revision: 1 }],
	request: request(),
	engineVersion: '1.0.0',
	...over
});

describe('what changed since the fit before', () => {
	it('is nothing for the first fit, and starting values where all else is equal', () => {
		expect(changesSince(null, fit())).toEqual([]);
		expect(changesSince(fit(), fit())).toEqual(['other starting values']);
	});

	it('names scheme and runs', () => {
		const after = fit({
			scheme: { id: 'y', name: 'One way', number: 1 },
			runs: [{ id: 'b', number: 2, name: 'Run 2', revision: 1 }]
		});
		expect(changesSince(fit(), after)).toEqual([
			'scheme One way in place of Reversible',
			'Run 2 added',
			'Run 1 left out'
		]);
		const revised = fit({ runs: [{ id: 'a', number: 1, name: 'Run 1', revision: 2 }] });
		expect(changesSince(fit(), revised)).toEqual(['Run 1 in revision 2']);
	});

	it('names constants as people see them, with what became of them', () => {
		const after = fit({
			request: request(
				{ fixed: ['s1.reverse.kRef'], weighting: { model: 'proportional' }, seed: 4 },
				{ A: { fit: true } }
			)
		});
		expect(changesSince(fit(), after)).toEqual([
			'k₋₁ held fixed',
			'A₀ (charge, Run 1) opened for fitting',
			'proportional error model in place of constant',
			'seed 4 in place of 1'
		]);
		expect(changesSince(after, fit())).toContain('k₋₁ no longer held fixed');
	});

	it('names constants that each run has for itself, and another criterion', () => {
		const after = fit({ request: request({ local: ['s1.forward.kRef'], criterion: 'determinant' }) });
		expect(changesSince(fit(), after)).toEqual([
			'k₁ of its own in each run',
			'determinant criterion in place of least squares'
		]);
		expect(changesSince(after, fit())).toEqual(['k₁ one for all runs again', 'least squares again']);
	});
});
