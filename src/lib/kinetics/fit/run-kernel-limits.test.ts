/**
 * The fit's own curves and derivatives at their limits, against Van Loan's block matrix (IEEE Trans. Autom. Control 23 (1978)
 * 395) in extended precision: nearly repeated rates, where the eigenbasis grows without limit, and fast reversible steps.
 */
import { describe, expect, it } from 'vitest';
import { ExtendedPropagator } from '../extended';
import type { LinearSystem } from '../types';
import { RunKernel } from './run-kernel';
import { uniformNumbers } from './sequence';
import { SpectralBasis, type Direction } from './spectral';

const one = (from: number, to: number): Direction => ({ from, products: [{ to, coefficient: 1 }] });

/** The network beside a copy fed by direction p: species n + i carries ∂c_i/∂ln k_p. */
function blockSystem(n: number, directions: Direction[], k: number[], p: number): LinearSystem {
	const outflow = new Float64Array(2 * n);
	const transfers: LinearSystem['transfers'] = [];
	const flows: NonNullable<LinearSystem['flows']> = [];
	directions.forEach(({ from, products }, step) => {
		const own = { step, direction: 'forward' as const, rate: k[step] };
		for (const shift of [0, n]) {
			outflow[from + shift] += k[step];
			flows.push({ ...own, from: from + shift });
			for (const { to, coefficient } of products)
				transfers.push({ ...own, from: from + shift, to: to + shift, coefficient });
		}
		if (step !== p) return;
		for (const { to, coefficient } of products) transfers.push({ ...own, from, to: to + n, coefficient });
		transfers.push({ ...own, from, to: from + n, coefficient: -1 });
	});
	return { n: 2 * n, outflow, transfers, flows };
}

/** Worst error of curves and of the derivatives by the directions asked for; the charge is one. */
function worst(n: number, directions: Direction[], k: number[], times: number[], by: number[]): number {
	const charge = Float64Array.from({ length: n }, (_, i) => (i === 0 ? 1 : 0));
	const all = directions.map((_, d) => d);
	const kernel = new RunKernel(n, directions, times.length, all, [], false);
	expect(kernel.evaluate(Float64Array.from(k), charge, Float64Array.from(times))).toBe(true);
	const start = new Float64Array(2 * n);
	start.set(charge);
	let error = 0;
	for (const p of by) {
		const exact = new ExtendedPropagator(blockSystem(n, directions, k, p));
		times.forEach((t, q) => {
			const truth = exact.apply(t, start);
			for (let i = 0; i < n; i++) {
				error = Math.max(error, Math.abs(truth[i] - kernel.curves[q * n + i]));
				const derivative = kernel.rateDerivatives[(p * times.length + q) * n + i];
				error = Math.max(error, Math.abs(truth[n + i] - derivative));
			}
		});
	}
	return error;
}

describe('nearly repeated rates', () => {
	it('leave derivatives right to 1e-11 of the charge on both sides of the limit where the eigenbasis is given up', () => {
		const random = uniformNumbers(43);
		const count = { kept: 0, declined: 0 };
		for (let trial = 0; trial < 200; trial++) {
			const base = Math.exp((random() - 0.5) * 3);
			const near = () => base * (1 + gap * (random() - 0.5));
			const gap = 10 ** (-0.3 - 3 * random());
			const n = 3 + (trial % 3);
			const directions = Array.from({ length: n - 1 }, (_, i) => one(i, i + 1));
			let k = directions.map(near);
			if (n === 3) {
				directions.push(one(2, 1));
				const [a, b] = [base * random(), base * random()];
				k = [(a + b) * (1 + gap * (random() - 0.5)), a, b];
			} else if (random() < 0.5) {
				directions.push({ from: n - 1, products: [] });
				k.push(near());
			}
			count[new SpectralBasis(n, directions).decompose(Float64Array.from(k)) ? 'kept' : 'declined']++;
			expect(worst(n, directions, k, [2 / base], [trial % directions.length])).toBeLessThan(1e-11);
		}
		// Both ways must have been taken often, else the limit was not tried.
		expect(Math.min(count.kept, count.declined)).toBeGreaterThan(50);
	});
});

describe('a fast reversible step', () => {
	const networks: [string, Direction[], (fast: number, ratio: number) => number[]][] = [
		['A ⇌ B → C', [one(0, 1), one(1, 0), one(1, 2)], (f, r) => [f, f / r, 0.3]],
		['A ⇌ B ⇌ C', [one(0, 1), one(1, 0), one(1, 2), one(2, 1)], (f, r) => [f, f / r, 0.3, 0.1]],
		['A → B ⇌ C → D', [one(0, 1), one(1, 2), one(2, 1), one(2, 3)], (f, r) => [0.7, f, f / r, 0.3]],
		[
			'A ⇌ B ⇌ C ⇌ A in balance, with a way out',
			[one(0, 1), one(1, 0), one(1, 2), one(2, 1), one(2, 0), one(0, 2), { from: 0, products: [] }],
			(f, r) => [f, f / r, 0.4, 0.2, 0.1, (0.1 * r * 0.4) / 0.2, 0.05]
		]
	];
	it.each(networks)('costs no digits in %s, k t up to 1e8', (_, directions, constants) => {
		const n = 1 + Math.max(...directions.flatMap((d) => [d.from, ...d.products.map((p) => p.to)]));
		for (const fast of [1, 1e4, 1e8])
			for (const ratio of [1, 3, 1e3]) {
				const k = constants(fast, ratio);
				expect(new SpectralBasis(n, directions).decompose(Float64Array.from(k))).toBe(true);
				const by = directions.map((__, d) => d);
				expect(worst(n, directions, k, [0.3, 3], by), `k ${fast}, K ${ratio}`).toBeLessThan(1e-14);
			}
	});
});

describe('a fast step in a loop out of detailed balance', () => {
	const loop = [one(0, 1), one(1, 0), one(1, 2), one(2, 1), one(2, 0), one(0, 2)];
	const networks: [string, Direction[], (fast: number, ratio: number) => number[]][] = [
		['with no way out', loop, (f, r) => [f, f / r, 0.4, 0.2, 0.7, 0.1]],
		[
			'with a slow way out',
			[...loop, { from: 1, products: [] }],
			(f, r) => [f, f / r, 0.4, 0.2, 0.7, 0.1, 0.05]
		],
		['that feeds a further step', [...loop, one(2, 3)], (f, r) => [f, f / r, 0.4, 0.2, 0.7, 0.1, 0.3]],
		['fed by another species', [one(3, 0), ...loop], (f, r) => [0.6, f, f / r, 0.4, 0.2, 0.7, 0.1]],
		['one way round, fast in one step', [one(0, 1), one(1, 2), one(2, 0)], (f, r) => [f, 0.4 / r, 0.3]],
		[
			'with two fast steps of different speed and a splitting way out',
			[...loop, { from: 0, products: [{ to: 3, coefficient: 2 }] }],
			(f, r) => [f, f / r, f / 100, f / 70, 0.7, 0.1, 0.2]
		]
	];
	it.each(networks)(
		'keeps curves and derivatives to 1e-13 of the charge %s, k t up to 3e9',
		(_, directions, constants) => {
			const n = 1 + Math.max(...directions.flatMap((d) => [d.from, ...d.products.map((p) => p.to)]));
			for (const fast of [1, 1e3, 1e6, 1e9])
				for (const ratio of [1, 30]) {
					const k = constants(fast, ratio);
					const by = directions.map((__, d) => d);
					expect(worst(n, directions, k, [0.3, 3], by), `k ${fast}, K ${ratio}`).toBeLessThan(1e-13);
				}
		}
	);
});
