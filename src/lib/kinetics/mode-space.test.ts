/**
 * Rates of the modes against the characteristic determinant in exact rational arithmetic: a simple eigenvalue lies between two
 * numbers at which det(K − λI) has opposite signs. Nothing here shares code with the ways of solving.
 */
import { describe, expect, it } from 'vitest';
import { type Family, randomCase, SystemBuilder } from './bench/families';
import { blockWeights } from './block-weights';
import { components } from './components';
import { modeSpace } from './mode-space';
import { complexSchur } from './schur';
import type { LinearSystem } from './types';

const SCALE = 400n;

/** value · 2^SCALE as an exact integer. */
function exact(value: number): bigint {
	if (value === 0) return 0n;
	const exponent = Math.floor(Math.log2(Math.abs(value))) - 52;
	return BigInt(Math.round(value / 2 ** exponent)) << (SCALE + BigInt(exponent));
}

/** Sign of det(K − λI) by fraction-free elimination (E. H. Bareiss, Math. Comp. 22 (1968) 565). */
function determinantSign(system: LinearSystem, lambda: number): number {
	const { n } = system;
	const a = Array.from({ length: n }, (_, i) =>
		Array.from({ length: n }, (_, j) => (i === j ? -exact(lambda) : 0n))
	);
	for (const { from, to, rate, coefficient } of system.transfers)
		a[to][from] += (exact(rate) * exact(coefficient)) >> SCALE;
	for (const { from, rate } of system.flows!) a[from][from] -= exact(rate);
	let sign = 1;
	let previous = 1n;
	for (let k = 0; k < n - 1; k++) {
		const pivot = a.findIndex((row, i) => i >= k && row[k] !== 0n);
		if (pivot < 0) return 0;
		if (pivot !== k) {
			[a[k], a[pivot]] = [a[pivot], a[k]];
			sign = -sign;
		}
		for (let i = k + 1; i < n; i++)
			for (let j = k + 1; j < n; j++) a[i][j] = (a[i][j] * a[k][k] - a[i][k] * a[k][j]) / previous;
		previous = a[k][k];
	}
	const last = a[n - 1][n - 1];
	return last === 0n ? 0 : last > 0n ? sign : -sign;
}

function ratesOf(system: LinearSystem) {
	const parts = components(system);
	return modeSpace(system, parts, blockWeights(system, parts));
}

describe('rates of the modes', () => {
	it.each<Family>([
		'chain',
		'tree',
		'reversible tree',
		'reversible loops',
		'stiff 1e12',
		'stiff 1e12 with loops'
	])('are right to 1e-12 of themselves where components are single or balanced: %s', (family) => {
		let checked = 0;
		for (let seed = 1; seed <= 12; seed++) {
			const { system } = randomCase(family, seed);
			const { lambda, kinds } = ratesOf(system);
			if (kinds.includes('general')) continue;
			const rates = Array.from(lambda.re).sort((a, b) => a - b);
			rates.forEach((value, j) => {
				const near = (other: number | undefined) =>
					other !== undefined && Math.abs(other / value - 1) < 1e-10;
				if (value === 0 || near(rates[j - 1]) || near(rates[j + 1])) return;
				const signs = [1 - 1e-12, 1 + 1e-12].map((f) => determinantSign(system, value * f));
				expect(signs[0] * signs[1], `seed ${seed}, rate ${value}`).toBe(-1);
				checked++;
			});
		}
		expect(checked).toBeGreaterThan(20);
	});
	it('have as many exact zeros as there are ends', () => {
		const system = new SystemBuilder(5)
			.step(0, [[1, 1]], 1e6, 1e-6)
			.step(2, [[3, 1]], 3, 1)
			.step(2, [[4, 1]], 1)
			.build();
		expect(Array.from(ratesOf(system).lambda.re).filter((value) => value === 0)).toHaveLength(2);
	});
	it('of a loop in detailed balance are found by rotations, of a driven loop by the Schur form', () => {
		const loop = (x: number) =>
			new SystemBuilder(3)
				.step(0, [[1, 1]], 1, 0.5)
				.step(1, [[2, 1]], 0.8, 0.2)
				.step(2, [[0, 1]], 0.3, x)
				.build();
		expect(ratesOf(loop(2.4)).kinds).toEqual(new Array(3).fill('detailed balance'));
		expect(ratesOf(loop(2.3)).kinds).toEqual(new Array(3).fill('general'));
	});
});

describe('complex Schur form', () => {
	it('gives the matrix back: A = D U T Uᴴ D⁻¹ with U unitary and T triangular', () => {
		const a = Float64Array.of(0, 1e6, 0, 2, -1, 3, 0, -4, 1e-3, 5, 0, 1, 1e-4, 0, 2, -7);
		const { scale, u, t, converged } = complexSchur(a, 4);
		expect(converged).toBe(true);
		for (let i = 0; i < 4; i++)
			for (let j = 0; j < 4; j++) {
				let value = 0;
				let unit = 0;
				for (let k = 0; k < 4; k++) {
					unit += u.re[k * 4 + i] * u.re[k * 4 + j] + u.im[k * 4 + i] * u.im[k * 4 + j];
					for (let l = k; l < 4; l++) {
						const re = u.re[i * 4 + k] * t.re[k * 4 + l] - u.im[i * 4 + k] * t.im[k * 4 + l];
						const im = u.re[i * 4 + k] * t.im[k * 4 + l] + u.im[i * 4 + k] * t.re[k * 4 + l];
						value += re * u.re[j * 4 + l] + im * u.im[j * 4 + l];
					}
				}
				expect(Math.abs((value * scale[i]) / scale[j] - a[i * 4 + j])).toBeLessThan(1e-8);
				expect(unit).toBeCloseTo(i === j ? 1 : 0, 13);
				if (i > j) expect(Math.hypot(t.re[i * 4 + j], t.im[i * 4 + j])).toBe(0);
			}
	});
});
