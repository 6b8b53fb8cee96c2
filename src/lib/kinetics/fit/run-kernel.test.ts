import { describe, expect, it } from 'vitest';
import { sensitivities } from '../sensitivity';
import type { LinearSystem } from '../types';
import { RunKernel } from './run-kernel';
import { uniformNumbers } from './sequence';
import { SpectralBasis, flowOrder, type Direction } from './spectral';

const one = (from: number, to: number): Direction => ({ from, products: [{ to, coefficient: 1 }] });

function compare(n: number, directions: Direction[], k: number[], charge: number[], times: number[]) {
	const constants = Float64Array.from(k);
	const rates = directions.map((_, d) => d);
	const charges = charge.map((_, i) => i);
	const kernel = new RunKernel(n, directions, times.length, rates, charges, true);
	expect(kernel.evaluate(constants, Float64Array.from(charge), Float64Array.from(times))).toBe(true);
	const parameters = [
		...rates.map((step) => ({ kind: 'rate' as const, step, direction: 'forward' as const })),
		...charges.map((species) => ({ kind: 'charge' as const, species }))
	];
	const truth = sensitivities(systemOf(n, directions, constants), charge, times, parameters);
	const found = [...kernel.rateDerivatives, ...kernel.chargeDerivatives];
	let worst = 0;
	truth.curves.forEach((c, i) => (worst = Math.max(worst, Math.abs(c - kernel.curves[i]))));
	truth.derivatives.forEach((d, i) => (worst = Math.max(worst, Math.abs(d - found[i]))));
	return worst;
}

/** The engine's linear system for these directions; each direction stands as a step of its own. */
function systemOf(n: number, directions: Direction[], constants: ArrayLike<number>): LinearSystem {
	const outflow = new Float64Array(n);
	const transfers: LinearSystem['transfers'] = [];
	const flows: NonNullable<LinearSystem['flows']> = [];
	directions.forEach(({ from, products }, step) => {
		const rate = constants[step];
		if (rate === 0) return;
		outflow[from] += rate;
		flows.push({ step, direction: 'forward', from, rate });
		for (const { to, coefficient } of products)
			transfers.push({ from, to, rate, coefficient, step, direction: 'forward' });
	});
	return { n, transfers, outflow, flows };
}

describe('the eigenbasis of the fit against the engine’s own derivatives', () => {
	it('agrees on 200 random networks of trees, chains and reversible steps', () => {
		const random = uniformNumbers(7);
		for (let trial = 0; trial < 200; trial++) {
			const n = 2 + Math.floor(random() * 5);
			const directions: Direction[] = [];
			for (let i = 1; i < n; i++) {
				const parent = Math.floor(random() * i);
				directions.push(one(parent, i));
				if (random() < 0.5) directions.push(one(i, parent));
			}
			if (random() < 0.3) directions.push({ from: n - 1, products: [] });
			const k = directions.map(() => Math.exp((random() - 0.5) * 8));
			const charge = Array.from({ length: n }, () => random());
			const times = [0, 0.01, 0.1, 0.7, 2, 9];
			expect(compare(n, directions, k, charge, times)).toBeLessThan(1e-10);
		}
	});

	it('hands over where rates repeat: 0.4/0.3/0.1 in A → B ⇌ C, and a chain of equal constants', () => {
		const abc = [one(0, 1), one(1, 2), one(2, 1)];
		expect(new SpectralBasis(3, abc).decompose(Float64Array.of(0.4, 0.3, 0.1))).toBe(false);
		expect(compare(3, abc, [0.4, 0.3, 0.1], [1, 0, 0], [0, 2.5, 5])).toBeLessThan(1e-12);
		const chain = [one(0, 1), one(1, 2), one(2, 3), one(3, 4)];
		expect(compare(5, chain, [1, 1, 1, 1], [1, 0, 0, 0, 0], [0.5, 4])).toBeLessThan(1e-12);
	});

	it('hands over for an irreversible loop, whose modes are complex', () => {
		const loop = [one(0, 1), one(1, 2), one(2, 0)];
		expect(new SpectralBasis(3, loop).decompose(Float64Array.of(1, 1, 1))).toBe(false);
		expect(compare(3, loop, [1, 1.2, 0.9], [1, 0, 0], [0.1, 1, 6])).toBeLessThan(1e-12);
	});

	it('keeps its accuracy next to a repeated rate', () => {
		const abc = [one(0, 1), one(1, 2), one(2, 1)];
		for (const gap of [1e-2, 1e-3, 3e-4, 1e-6, 1e-10])
			expect(compare(3, abc, [0.4 + gap, 0.3, 0.1], [1, 0, 0], [0, 2.5, 5])).toBeLessThan(2e-9);
	});

	it('carries 100 random loops, balanced or not, fast and slow, without the eigenbasis', () => {
		const random = uniformNumbers(11);
		for (let trial = 0; trial < 100; trial++) {
			const n = 3 + Math.floor(random() * 3);
			const directions = Array.from({ length: n }, (_, i) => one(i, (i + 1) % n));
			directions.push(one(0, n - 1), { from: 1, products: [] });
			const k = directions.map(() => Math.exp((random() - 0.5) * 10));
			const charge = Array.from({ length: n }, () => random());
			const times = [0, 0, 0.01, 0.3, 0.31];
			expect(compare(n, directions, k, charge, times)).toBeLessThan(1e-11);
		}
	});

	it('orders species with the flow', () => {
		expect(flowOrder(4, [one(2, 0), one(0, 3), one(3, 0), one(3, 1)]).map((g) => g.sort())).toEqual([
			[2],
			[0, 3],
			[1]
		]);
	});
});
