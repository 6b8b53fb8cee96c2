import { describe, expect, it } from 'vitest';
import { integralSensitivities } from './material-sensitivity';
import type { SensitivityParameter } from './sensitivity';
import { solve } from './solve';
import { chain, system } from './test-systems';

describe('sensitivities of integrals', () => {
	it('are exact for A → B: ∫A dt = (1 − e^{−kt})/k', () => {
		const [k, t] = [0.7, 2.5];
		const found = integralSensitivities(chain([k]), [1, 0], t, [
			{ kind: 'rate', step: 0, direction: 'forward' },
			{ kind: 'charge', species: 0 }
		]);
		const decay = Math.exp(-k * t);
		expect(found.integral[0]).toBeCloseTo((1 - decay) / k, 14);
		expect(found.ofIntegral[0]).toBeCloseTo(t * decay - (1 - decay) / k, 13);
		expect(found.ofIntegral[2]).toBeCloseTo((1 - decay) / k, 13);
		expect(found.turnover[0]).toBeCloseTo(1 - decay, 14);
		expect(found.ofTurnover[0]).toBeCloseTo(k * t * decay, 13);
	});

	it('agree with extrapolated differences for a branched reversible scheme', () => {
		const build = (k: number[]) =>
			system(4, [
				[0, 1, k[0]],
				[1, 0, k[1]],
				[1, 2, k[2], 2],
				[2, 3, k[3]],
				[0, -1, k[4]]
			]);
		const k = [1.5, 0.4, 0.7, 0.2, 0.1];
		const parameters = k.map((_, step): SensitivityParameter => ({
			kind: 'rate',
			step,
			direction: 'forward'
		}));
		const found = integralSensitivities(build(k), [1, 0, 0, 0], 3, parameters);
		parameters.forEach((_, p) => {
			const difference = (h: number) => {
				const [up, down] = [h, -h].map((step) =>
					solve(build(k.map((v, i) => (i === p ? v * Math.exp(step) : v))), [1, 0, 0, 0]).integral(3)
				);
				return up.map((value, i) => (value - down[i]) / (2 * h));
			};
			const [coarse, fine] = [difference(0.02), difference(0.01)];
			for (let i = 0; i < 4; i++)
				expect(Math.abs(found.ofIntegral[p * 4 + i] - (4 * fine[i] - coarse[i]) / 3)).toBeLessThan(1e-8);
		});
		expect([...found.integral]).toEqual(
			[...solve(build(k), [1, 0, 0, 0]).integral(3)].map((v) => expect.closeTo(v, 12) as number)
		);
	});
});
