import { describe, expect, it } from 'vitest';
import { FAMILIES, randomCase, SystemBuilder } from './bench/families';
import { ExtendedPropagator } from './extended';
import { finalComposition } from './final-composition';
import { Propagator } from './propagator';

describe('the non-negative evaluation', () => {
	it.each(FAMILIES)('keeps twelve digits of every concentration, however small: %s', (family) => {
		for (let seed = 31; seed <= 36; seed++) {
			const { system, charge, timesS } = randomCase(family, seed);
			const exact = new ExtendedPropagator(system);
			const propagator = new Propagator(system);
			for (const timeS of timesS) {
				const got = propagator.apply(timeS, charge);
				exact.apply(timeS, charge).forEach((value, i) => {
					if (value > 1e-60) expect(Math.abs(got[i] / value - 1), `seed ${seed}`).toBeLessThan(2e-12);
				});
			}
		}
	});
	it('steps along a grid without adding up rounding', () => {
		const { system, charge } = randomCase('stiff 1e12', 5);
		const propagator = new Propagator(system);
		const grid = { firstS: 0, stepS: 1e3, count: 200 };
		const out = propagator.applyGrid(grid, charge, new Float64Array(200 * system.n));
		for (const k of [1, 15, 16, 199])
			propagator
				.apply(k * 1e3, charge)
				.forEach((value, i) => expect(Math.abs(out[k * system.n + i] - value)).toBeLessThan(1e-13));
	});
	it('gives the matrix of a time, whose columns keep mass', () => {
		const system = new SystemBuilder(3)
			.step(0, [[1, 1]], 1e6, 1e5)
			.step(1, [[2, 1]], 1e-3, 1e-4)
			.build();
		const p = new Propagator(system).matrix(500);
		for (let j = 0; j < 3; j++) expect(Math.abs(p[j] + p[3 + j] + p[6 + j] - 1)).toBeLessThan(1e-14);
	});
});

describe('the final composition', () => {
	it('is where the curves end', () => {
		for (const family of ['tree', 'reversible loops', 'irreversible loops', 'mixed', 'disconnected'] as const)
			for (let seed = 1; seed <= 5; seed++) {
				const { system, charge } = randomCase(family, seed);
				const end = new Propagator(system).apply(1e12, charge);
				finalComposition(system, charge).final.forEach((value, i) =>
					expect(Math.abs(value - end[i]), `${family}, seed ${seed}`).toBeLessThan(1e-13)
				);
			}
	});
});
