/**
 * Schemes at the edge of what double precision can tell: fast loops with a slow way out, splitting loops whose constants differ
 * by twenty decades, and one where two ways of solving disagree so that extended precision decides. Against 120-digit arithmetic.
 */
import { describe, expect, it } from 'vitest';
import { SystemBuilder } from './bench/families';
import { ExtendedPropagator } from './extended';
import { solve } from './solve';
import type { LinearSystem } from './types';

function worst(system: LinearSystem, charge: number[], timesS: number[]): number {
	const solution = solve(system, charge);
	const exact = new ExtendedPropagator(system);
	const total = charge.reduce((a, b) => a + b, 0);
	let error = 0;
	for (const timeS of timesS) {
		const truth = exact.apply(timeS, charge);
		solution.at(timeS).forEach((c, i) => {
			error = Math.max(error, Number.isFinite(c) ? Math.abs(c - truth[i]) / total : Infinity);
		});
	}
	return error;
}

describe('a fast one-way loop with a slow way out', () => {
	it.each([1e-2, 1e-6, 1e-8, 1e-12])(
		'decays at the slow rate and never grows, exit %g beside 1e10: the slow mode is below the rounding of the fast ones',
		(exit) => {
			const system = new SystemBuilder(3)
				.step(0, [[1, 1]], 1.3e10)
				.step(1, [[2, 1]], 2.1e10)
				.step(2, [[0, 1]], 0.7e10)
				.step(2, [], exit)
				.build();
			const times = [1e-3, 1, 50, 5000].map((factor) => factor / exit);
			expect(worst(system, [1, 0, 0], times)).toBeLessThan(1e-12);
		}
	);
});

describe('a splitting loop, A → 2 B and B → ½ A', () => {
	it.each([1e-3, 1e-9, 1e-13])('is not refused, and keeps its slow way out, exit %g beside 1e6', (exit) => {
		const system = new SystemBuilder(3)
			.step(0, [[1, 2]], 3e6)
			.step(1, [[0, 0.5]], 1e6)
			.step(1, [[2, 1]], exit)
			.build();
		expect(worst(system, [1, 0, 0], [1e-7, 1e-3 / exit, 1 / exit, 60 / exit])).toBeLessThan(1e-12);
	});
	it('is refused where it multiplies', () => {
		const system = new SystemBuilder(2)
			.step(0, [[1, 2]], 3e6)
			.step(1, [[0, 0.6]], 1e-9)
			.build();
		expect(() => solve(system, [1, 0])).toThrow('multiply without limit');
	});
	it('loses what its coefficients lose, however slowly: B → 0.4 A', () => {
		const system = new SystemBuilder(2)
			.step(0, [[1, 2]], 3e8)
			.step(1, [[0, 0.4]], 1e-8)
			.build();
		expect(worst(system, [1, 0], [1e-9, 1e6, 1e8, 1e9])).toBeLessThan(1e-12);
	});
});

describe('where two ways differ by more than both their bounds', () => {
	// Found among 40 000 random schemes of up to 40 decades: constants of 1e-8 to 1e8, four of them equal but for
	// rounding. The grouped closed form misses its own bound by little, so only a comparison can tell.
	const system = new SystemBuilder(4)
		.step(0, [[1, 1]], 1.420275617036625e-8, 196325251.04470566)
		.step(1, [[2, 1]], 415367107.0910882, 196325251.04470563)
		.step(0, [[3, 1]], 196325251.04470566, 1.239816984791957)
		.step(1, [], 196325251.0447057)
		.build();

	it('extended precision decides, says so, and the curves are right', () => {
		const solution = solve(system, [1, 0, 0, 0]);
		expect(solution.method).toBe('extended');
		expect(solution.errorEstimate).toBeLessThan(1e-12);
		const times = [1e-12, 1e-9, 5e-9, 2e-8, 1e-6, 1e-2, 1, 50, 1e6, 1e9, 1e12];
		expect(worst(system, [1, 0, 0, 0], times)).toBeLessThan(1e-13);
	});
});
