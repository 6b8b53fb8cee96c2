/**
 * Traces at early times, right to 1e-9 of themselves where they are 1e-12 of the charge and less: c ∝ t^m k₁…k_m/m! m steps down
 * a chain. Against 120-digit arithmetic.
 */
import { describe, expect, it } from 'vitest';
import { SystemBuilder } from './bench/families';
import { ExtendedPropagator } from './extended';
import { solve } from './solve';
import type { LinearSystem } from './types';

/** Times at which species `at` passes 10^−6, 10^−12, 10^−18 … of the charge, by the leading term of its series. */
function timesOf(product: number, order: number, factorial: number): number[] {
	return [-6, -9, -12, -15, -18, -30].map((e) => ((10 ** e * factorial) / product) ** (1 / order));
}

function worstRelative(system: LinearSystem, species: number, times: number[]): number {
	const charge = Array.from({ length: system.n }, (_, i) => (i === 0 ? 1 : 0));
	const exact = new ExtendedPropagator(system);
	const solution = solve(system, charge);
	const curves = solution.curves(times);
	return times.reduce((worst, t, k) => {
		const truth = exact.apply(t, charge)[species];
		const found = [solution.at(t)[species], curves[k * system.n + species]];
		return Math.max(worst, ...found.map((c) => Math.abs(c / truth - 1)));
	}, 0);
}

const down = (rates: number[], reverse: number[] = []): LinearSystem => {
	const builder = new SystemBuilder(rates.length + 1);
	rates.forEach((k, i) => builder.step(i, [[i + 1, 1]], k, reverse[i] ?? 0));
	return builder.build();
};

const cases: [string, number[], number[]?][] = [
	['one-way, constants apart', [1, 0.8, 0.5, 0.3]],
	['one-way, all equal', [0.7, 0.7, 0.7, 0.7]],
	['one-way, equal but for 1e-9', [0.7, 0.7 + 1e-9, 0.7 - 1e-9, 0.7]],
	['reversible', [1, 0.8, 0.5, 0.3], [0.4, 2, 0.1, 0.7]],
	['a fast equilibrium in front', [1e6, 0.8, 0.5, 0.3], [3e6]],
	['constants from 1e-6 to 1e6', [1e6, 1, 1e-6, 1e3]]
];

describe('a trace four steps down a chain', () => {
	it.each(cases)('is right to 1e-9 of itself down to 1e-30 of the charge: %s', (_, rates, reverse) => {
		const times = timesOf(
			rates.reduce((a, b) => a * b, 1),
			4,
			24
		);
		expect(worstRelative(down(rates, reverse), 4, times)).toBeLessThan(1e-9);
	});

	it('is right eleven steps down as well, in a chain of twelve species over twelve decades', () => {
		const rates = Array.from({ length: 11 }, (_, i) => 10 ** (6 - ((i * 7) % 13)));
		const product = rates.reduce((a, b) => a * b, 1);
		expect(worstRelative(down(rates), 11, timesOf(product, 11, 39916800))).toBeLessThan(1e-9);
	});
});
