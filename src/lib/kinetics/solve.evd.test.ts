/**
 * The structured solution beside a second, independent algorithm: the general eigenvalue decomposition of ml-matrix,
 * on schemes where that one can be trusted (well-conditioned, distinct rates), and the two where it cannot.
 */
import { EigenvalueDecomposition, inverse, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { rateMatrix } from './linear-system';
import { solve } from './solve';
import type { LinearSystem } from './types';

type Edge = [from: number, to: number, rate: number];

function system(n: number, edges: Edge[]): LinearSystem {
	const outflow = new Float64Array(n);
	for (const [from, , rate] of edges) outflow[from] += rate;
	return {
		n,
		outflow,
		transfers: edges.map(([from, to, rate], step) => ({
			from,
			to,
			rate,
			coefficient: 1,
			step,
			direction: 'forward'
		}))
	};
}

/** V · e^{Λt} · V⁻¹ c₀ with a real basis: 2 × 2 blocks of D for complex pairs, by the textbook. */
function textbook(of: LinearSystem, charge: number[], t: number): number[] {
	const k = rateMatrix(of);
	const a = Matrix.from1DArray(of.n, of.n, Array.from(k));
	const {
		realEigenvalues: re,
		imaginaryEigenvalues: im,
		eigenvectorMatrix: v
	} = new EigenvalueDecomposition(a);
	const e = Matrix.zeros(of.n, of.n);
	for (let j = 0; j < of.n; j++) {
		const growth = Math.exp(re[j] * t);
		if (im[j] === 0) e.set(j, j, growth);
		else if (im[j] > 0) {
			const [c, s] = [growth * Math.cos(im[j] * t), growth * Math.sin(im[j] * t)];
			e.set(j, j, c);
			e.set(j, j + 1, s);
			e.set(j + 1, j, -s);
			e.set(j + 1, j + 1, c);
		}
	}
	return v.mmul(e).mmul(inverse(v)).mmul(Matrix.columnVector(charge)).to1DArray();
}

const GOOD: [string, LinearSystem][] = [
	[
		'A → B ⇌ C',
		system(3, [
			[0, 1, 0.794],
			[1, 2, 0.297],
			[2, 1, 0.0952]
		])
	],
	[
		'a branched tree with reversible steps',
		system(5, [
			[0, 1, 1],
			[1, 0, 0.4],
			[1, 2, 0.3],
			[1, 3, 0.15],
			[3, 1, 0.05],
			[3, 4, 0.7]
		])
	],
	[
		'an irreversible loop (complex pair)',
		system(3, [
			[0, 1, 1],
			[1, 2, 1],
			[2, 0, 1]
		])
	],
	[
		'a loop with an exit',
		system(4, [
			[0, 1, 2],
			[1, 2, 0.7],
			[2, 0, 0.3],
			[2, 3, 0.2]
		])
	]
];

describe('the structured solution beside a general eigen-solver', () => {
	it.each(GOOD)('agrees on %s', (_name, of) => {
		const charge = Array.from({ length: of.n }, (_, i) => (i === 0 ? 0.5 : 0));
		const solution = solve(of, charge);
		for (const t of [0.01, 0.5, 2, 10, 40]) {
			const ours = solution.at(t);
			textbook(of, charge, t).forEach((value, i) => expect(ours[i]).toBeCloseTo(value, 11));
		}
	});

	it('stays right where that one returns nonsense: a chain of four equal constants', () => {
		const chain = system(5, [
			[0, 1, 1],
			[1, 2, 1],
			[2, 3, 1],
			[3, 4, 1]
		]);
		const charge = [1, 0, 0, 0, 0];
		// Poisson terms e^{-t} t^n / n! (Bateman 1910, confluent limit).
		const t = 1.7;
		const exact = [0, 1, 2, 3].map((n) => (Math.exp(-t) * t ** n) / [1, 1, 2, 6][n]);
		const ours = solve(chain, charge).at(t);
		exact.forEach((value, i) => expect(ours[i]).toBeCloseTo(value, 14));
		const theirs = textbook(chain, charge, t);
		expect(Math.max(...exact.map((value, i) => Math.abs(theirs[i] - value)))).toBeGreaterThan(1e-6);
	});
});
