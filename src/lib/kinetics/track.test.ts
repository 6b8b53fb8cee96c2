import { describe, expect, it } from 'vitest';
import { FAMILIES, randomCase } from './bench/families';
import { maximumOn } from './extrema';
import { solve } from './solve';
import { chain, system } from './test-systems';
import { formAt, track, trackOf } from './track';

describe('the track of a curve', () => {
	it('is the curve to 1e-13 of the charge, for every family of random networks', () => {
		for (const family of FAMILIES)
			for (let seed = 101; seed < 104; seed++) {
				const { system: drawn, charge } = randomCase(family, seed);
				const solution = solve(drawn, charge);
				const found = trackOf(solution);
				const total = Array.from(charge).reduce((sum, c) => sum + c, 0);
				for (let i = 0; i < solution.n; i++) {
					const weights = Float64Array.from({ length: solution.n }, (_, j) => (i === j ? 1 : 0));
					for (let k = 0; k < 24; k++) {
						const timeS = 0.999 * found.endS * 10 ** (-k / 2);
						const difference = formAt(found, weights, 0, timeS) - solution.at(timeS)[i];
						expect(Math.abs(difference)).toBeLessThan(1e-13 * total);
					}
					expect(Number.isFinite(maximumOn(found, weights).value)).toBe(true);
				}
			}
	});

	it('ends at the horizon, or where the curve has reached its limit', () => {
		const solution = solve(chain([1, 0.5]), [1, 0, 0]);
		expect(trackOf(solution, 3)).toMatchObject({ endS: 3, beyond: null });
		const whole = trackOf(solution);
		expect(whole.endS).toBeGreaterThan(30 / 0.5);
		expect([...whole.beyond!]).toEqual([0, 0, 1]);
	});

	it('goes on to the end of a slow way out that the modes of a fast loop have lost in rounding', () => {
		for (const exit of [1e-4, 1e-7, 1e-9]) {
			const loop = system(3, [
				[0, 1, 1.3e10],
				[1, 2, 2.1e10],
				[2, 0, 0.7e10],
				[2, -1, exit]
			]);
			const solution = solve(loop, [1, 0, 0]);
			expect(solution.method).toBe('uniformisation');
			const found = trackOf(solution);
			expect(found.endS).toBeGreaterThan(20 / exit);
			for (const timeS of [1e-9, 0.3 / exit, 3 / exit, 15 / exit])
				expect(
					Math.abs(
						formAt(found, [1, 1, 1], 0, timeS) -
							Math.exp((-timeS * exit * (1.3 * 2.1)) / (1.3 * 2.1 + 1.3 * 0.7 + 2.1 * 0.7))
					)
				).toBeLessThan(1e-9);
		}
	});

	it('asks for a horizon where there is no limit', () => {
		const endless = { n: 1, at: (t: number, out = new Float64Array(1)) => out.fill(t) };
		expect(() => track(endless)).toThrow(/Give a latest time/);
		expect(formAt(track(endless, { horizonS: 5 }), [1], 0, 4.2)).toBeCloseTo(4.2, 13);
	});
});
