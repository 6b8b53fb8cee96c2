import { describe, expect, it } from 'vitest';
import reference from '../../../../tests/reference/c09a_quantiles.json';
import {
	chiSquareCdf,
	chiSquareQuantile,
	chiSquareUpper,
	fCdf,
	fQuantile,
	fUpper,
	incompleteBeta,
	normalCdf,
	normalQuantile,
	studentCdf,
	studentQuantile
} from './distributions';

const relative = (found: number, expected: number) => Math.abs(found / expected - 1);

// Source of the tables: NIST/SEMATECH e-Handbook 1.3.6.7, recomputed at 40 digits (c09a_quantiles.json).
describe('quantiles against the 40-digit table', () => {
	it('gives Student quantiles to 12 digits', () => {
		for (const row of reference.expected.t.value) {
			expect(relative(studentQuantile(0.95, row.dof), row.t_0_95)).toBeLessThan(3e-14);
			expect(relative(studentQuantile(0.975, row.dof), row.t_0_975)).toBeLessThan(3e-14);
			expect(relative(studentQuantile(0.995, row.dof), row.t_0_995)).toBeLessThan(3e-13);
		}
	});

	it('gives F quantiles to 12 digits', () => {
		for (const [df1, df2, f95, f99] of reference.expected.F.value) {
			expect(relative(fQuantile(0.95, df1, df2), f95)).toBeLessThan(1e-12);
			expect(relative(fQuantile(0.99, df1, df2), f99)).toBeLessThan(1e-12);
		}
	});

	it('gives chi-square quantiles to the digits printed', () => {
		for (const [dof, low, mid, high] of reference.expected.chi2.value) {
			expect(relative(chiSquareQuantile(0.025, dof), low)).toBeLessThan(2e-12);
			expect(relative(chiSquareQuantile(0.95, dof), mid)).toBeLessThan(2e-12);
			expect(relative(chiSquareQuantile(0.975, dof), high)).toBeLessThan(2e-12);
		}
	});
});

describe('identities', () => {
	it('inverts the cumulative distributions over many degrees of freedom', () => {
		for (const dof of [0.5, 1, 2.5, 7, 33, 400, 20000])
			for (const p of [1e-8, 0.01, 0.3, 0.5, 0.9, 0.999]) {
				expect(relative(studentCdf(studentQuantile(p, dof), dof), p)).toBeLessThan(1e-12);
				expect(relative(chiSquareCdf(chiSquareQuantile(p, dof), dof), p)).toBeLessThan(1e-11);
				expect(relative(fCdf(fQuantile(p, dof, 9), dof, 9), p)).toBeLessThan(1e-11);
			}
	});

	it('joins t, F, chi-square and normal as theory says', () => {
		const t = studentQuantile(0.975, 12);
		expect(relative(fQuantile(0.95, 1, 12), t * t)).toBeLessThan(1e-13);
		const z = normalQuantile(0.975);
		expect(relative(chiSquareQuantile(0.95, 1), z * z)).toBeLessThan(1e-13);
		expect(studentQuantile(0.975, Infinity)).toBe(z);
		// ν = 1 is Cauchy's distribution: t = tan(π(p − ½)).
		expect(relative(studentQuantile(0.9, 1), Math.tan(Math.PI * 0.4))).toBeLessThan(1e-14);
		// ν₁ = ν₂ = 2: P(F ≤ x) = x/(1 + x).
		expect(relative(fCdf(3, 2, 2), 0.75)).toBeLessThan(1e-14);
		expect(relative(fUpper(3, 2, 2), 0.25)).toBeLessThan(1e-14);
		expect(relative(chiSquareUpper(3, 2), Math.exp(-1.5))).toBeLessThan(1e-13);
	});

	it('keeps its digits in the far tail', () => {
		// Abramowitz & Stegun table 26.2: P(Z > 5) = 2.866515719e-7 (10 figures).
		expect(relative(normalCdf(-5), 2.866515719e-7)).toBeLessThan(1e-9);
		expect(relative(normalCdf(normalQuantile(1e-15)), 1e-15)).toBeLessThan(1e-12);
		expect(normalCdf(0)).toBe(0.5);
	});

	it('answers NaN, not a number that looks right, to nonsense', () => {
		expect(studentQuantile(1.2, 4)).toBeNaN();
		expect(fQuantile(0.95, 0, 4)).toBeNaN();
		expect(incompleteBeta(-1, 1, 0.5)[0]).toBeNaN();
	});
});
