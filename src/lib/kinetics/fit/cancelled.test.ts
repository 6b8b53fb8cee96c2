import { describe, expect, it } from 'vitest';
import { fitRequest } from '../../schemas/fit';
import { FitCancelled, watchOver } from './cancelled';
import { fit } from './fit';
import { KineticModel } from './model';
import { compileProblem } from './problem';

/** An irreversible loop: no real eigenbasis, so that every time costs a step of its own. */
const loop = fitRequest.parse({
	species: ['A', 'B', 'C'].map((id) => ({ id })),
	steps: ['AB', 'BC', 'CA'].map((pair, i) => ({
		id: `s${i + 1}`,
		reactant: pair[0],
		products: [{ species: pair[1] }],
		forward: { kRef: { value: 0.5 + 0.2 * i, unit: '1/h' } },
		reverse: null
	})),
	referenceTemperature: { value: 40, unit: 'degC' },
	runs: [
		{
			temperature: { value: 40, unit: 'degC' },
			initial: { A: { value: 1, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: ['A', 'B'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
			timepoints: Array.from({ length: 25 }, (_, k) => ({ time: (k + 1) / 4, values: { A: 0.4, B: 0.3 } }))
		}
	],
	options: { starts: 2, profiles: false }
});

describe('stopping a fit', () => {
	it('is asked for at every time of a long evaluation, not only before it', () => {
		const model = new KineticModel(compileProblem(loop).problem!);
		let asked = 0;
		model.watch = () => asked++;
		const x = Float64Array.from([0.5, 0.7, 0.9], (k) => Math.log(k / 3600));
		const residuals = new Float64Array(model.m);
		const jacobian = new Float64Array(model.m * model.p);
		expect(model.evaluate(x, residuals, jacobian)).toBe(true);
		expect(asked).toBeGreaterThanOrEqual(25);
		const before = residuals.slice();
		let left = 10;
		model.watch = watchOver(() => --left < 0);
		expect(() => model.evaluate(x, residuals, jacobian)).toThrow(FitCancelled);
		// A model that was stopped half way is as good as new.
		model.watch = null;
		model.evaluate(x, residuals, jacobian);
		expect(residuals).toEqual(before);
	});

	it('leaves the numbers of a fit that is only asked', () => {
		const asked = fit(loop, { cancelled: () => false });
		expect(JSON.stringify(asked)).toBe(JSON.stringify(fit(loop)));
	});

	it('works at every stage: whenever the answer turns, FitCancelled is thrown', () => {
		let calls = 0;
		fit(loop, { cancelled: () => (calls++, false) });
		for (const share of [0, 0.01, 0.3, 0.7, 0.99]) {
			let left = Math.floor(share * (calls - 1));
			expect(() => fit(loop, { cancelled: () => left-- <= 0 })).toThrow(FitCancelled);
		}
	});
});
