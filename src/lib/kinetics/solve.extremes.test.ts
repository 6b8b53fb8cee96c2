/**
 * Schemes at the edge of what double precision can tell: fast loops with a slow way out, splitting loops whose constants differ
 * by twenty decades, and one where two ways of solving disagree so that extended precision decides. Against 120-digit arithmetic.
 */
import { describe, expect, it } from 'vitest';
import { random, SystemBuilder } from './bench/families';
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

describe('random schemes of constants up to forty decades apart', () => {
	it('err by less than 1e-12 of the charge, are never negative, and keep mass to 1e-12', () => {
		for (let seed = 1; seed <= 90; seed++) {
			const next = random(seed * 977 + 3);
			const n = 2 + Math.floor(next() * 5);
			const rate = () => 10 ** ([16, 24, 40][seed % 3] * (next() - 0.5));
			const builder = new SystemBuilder(n);
			for (let i = 1; i < n; i++)
				builder.step(
					next() < 0.6 ? i - 1 : Math.floor(next() * i),
					[[i, 1]],
					rate(),
					next() < 0.5 ? rate() : 0
				);
			if (next() < 0.5 && n > 2) builder.step(n - 1, [[0, 1]], rate());
			const system = builder.build();
			const charge = Array.from({ length: n }, (_, i) => (i === 0 ? 1 : 0));
			const rates = system.flows!.map((f) => f.rate);
			const [low, high] = [1e-3 / Math.max(...rates), 1e3 / Math.min(...rates)];
			const times = Array.from({ length: 5 }, (_, k) => low * (high / low) ** ((k + next()) / 5));
			expect(worst(system, charge, times), `seed ${seed}`).toBeLessThan(1e-12);
			const curves = solve(system, charge).curves(times);
			expect(Math.min(...curves), `seed ${seed}`).toBeGreaterThanOrEqual(0);
			times.forEach((_, k) => {
				const mass = curves.subarray(k * n, (k + 1) * n).reduce((a, b) => a + b, 0);
				expect(Math.abs(mass - 1), `seed ${seed}`).toBeLessThan(1e-12);
			});
		}
	});
});

describe('A → B ⇌ C about its degenerate point', () => {
	const gaps = Array.from({ length: 14 }, (_, i) => 10 ** (-2 - i)).flatMap((gap) => [gap, -gap]);
	it.each(gaps)('keeps every digit with k1 off k2 + k−2 by %g', (gap) => {
		const system = new SystemBuilder(3)
			.step(0, [[1, 1]], 0.4 + gap)
			.step(1, [[2, 1]], 0.3, 0.1)
			.build();
		expect(worst(system, [1, 0, 0], [1e-3, 0.1, 1, 2.5, 5, 20, 60])).toBeLessThan(3e-14);
	});
});

describe('t = 0', () => {
	const charge = [0.1, 0.2, 0.30000000000000004, 1e-300];
	const chain = (k: number[]) => {
		const builder = new SystemBuilder(4);
		k.forEach((rate, i) => builder.step(i, [[i + 1, 1]], rate));
		return builder;
	};
	const systems: [string, LinearSystem][] = [
		['triangular', chain([1, 0.7, 0.2]).build()],
		['confluent', chain([1, 1, 1]).build()],
		[
			'symmetrised',
			chain([1, 0.7, 0.2])
				.step(1, [[0, 1]], 0.3)
				.build()
		],
		[
			'general',
			chain([1, 0.7, 0.2])
				.step(3, [[0, 1]], 0.3)
				.build()
		],
		[
			'uniformisation',
			chain([1e12, 1e12 * (1 + 3e-3), 1e12 * (1 - 3e-3)])
				.step(3, [[2, 1]], 1)
				.build()
		]
	];
	it.each(systems)('gives the charge to the last bit, alone, in a list and on a grid: %s', (_, system) => {
		const solution = solve(system, charge);
		expect([...solution.at(0)]).toEqual(charge);
		expect([...solution.curves([3, 0, 1e-9]).subarray(4, 8)]).toEqual(charge);
		const grid = solution.curves(Float64Array.from({ length: 200 }, (__, k) => k * 0.05));
		expect([...grid.subarray(0, 4)]).toEqual(charge);
	});
});
