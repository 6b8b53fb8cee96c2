/**
 * Normal, Student t, F and chi-square distributions: tail areas and quantiles to double accuracy.
 *
 * Tail areas are incomplete beta and gamma functions (`incomplete-functions.ts`). Quantiles are found on ln x by Newton steps on
 * the logarithm of the smaller tail, kept inside a bracket.
 *
 * Source: Abramowitz & Stegun, Handbook of Mathematical Functions (1964) 26.4 to 26.7.
 */
import { betaPrefactor, gammaPrefactor, incompleteBeta, incompleteGamma } from './incomplete-functions';

export { incompleteBeta, incompleteGamma };

/** Two tails and the density at x of a distribution on x > 0. */
interface Positive {
	tails(x: number): [number, number];
	density(x: number): number;
}

/** x with P(X ≤ x) = `lower` and P(X > x) = `upper` (given both, so that a small tail keeps its digits). */
function positiveQuantile(of: Positive, lower: number, upper: number, guess: number): number {
	if (lower <= 0) return 0;
	if (upper <= 0) return Infinity;
	const useLower = lower < upper;
	const target = Math.log(useLower ? lower : upper);
	const sign = useLower ? 1 : -1;
	// g(u) = ±(ln tail(eᵘ) − target) increases with u.
	const g = (u: number) => sign * (Math.log(of.tails(Math.exp(u))[useLower ? 0 : 1]) - target);
	let low = Math.log(guess);
	let high = low;
	let width = 1;
	while (g(low) > 0) low -= width *= 2;
	width = 1;
	while (g(high) < 0) high += width *= 2;
	let u = Math.min(Math.max(Math.log(guess), low), high);
	for (let k = 0; k < 200; k++) {
		const x = Math.exp(u);
		const tail = of.tails(x)[useLower ? 0 : 1];
		const value = sign * (Math.log(tail) - target);
		if (value === 0) break;
		if (value > 0) high = u;
		else low = u;
		let next = u - (value * tail) / (of.density(x) * x);
		if (!(next > low && next < high)) next = 0.5 * (low + high);
		if (Math.abs(next - u) <= 1e-16 * Math.max(1, Math.abs(u)) || next === low || next === high) {
			u = next;
			break;
		}
		u = next;
	}
	return Math.exp(u);
}

/** P(|T| > t) and P(|T| ≤ t) for t ≥ 0. */
function studentTwoSided(t: number, dof: number): [number, number] {
	const t2 = t * t;
	return incompleteBeta(dof / 2, 0.5, dof / (dof + t2), t2 / (dof + t2));
}

/** P(T ≤ t) of Student's distribution. */
export function studentCdf(t: number, dof: number): number {
	if (!Number.isFinite(dof)) return normalCdf(t);
	const outside = studentTwoSided(Math.abs(t), dof)[0];
	return t > 0 ? 1 - outside / 2 : outside / 2;
}

/** t with P(T ≤ t) = probability, for dof > 0 (not only whole). */
export function studentQuantile(probability: number, dof: number): number {
	if (!(probability >= 0 && probability <= 1) || !(dof > 0)) return NaN;
	if (!Number.isFinite(dof)) return normalQuantile(probability);
	if (probability === 0.5) return 0;
	if (probability < 0.5) return -studentFromTail(probability, dof);
	return studentFromTail(1 - probability, dof);
}

function studentFromTail(tail: number, dof: number): number {
	const outside = 2 * tail;
	const density = (t: number) => {
		const t2 = t * t;
		return (2 * betaPrefactor(dof / 2, 0.5, dof / (dof + t2), t2 / (dof + t2))) / t;
	};
	const tails = (t: number): [number, number] => {
		const [beyond, within] = studentTwoSided(t, dof);
		return [within, beyond];
	};
	return positiveQuantile({ tails, density }, 1 - outside, outside, 1);
}

function fTails(x: number, df1: number, df2: number): [number, number] {
	const total = df1 * x + df2;
	return incompleteBeta(df1 / 2, df2 / 2, (df1 * x) / total, df2 / total);
}

/** P(F > x): the p value of an F test. */
export const fUpper = (x: number, df1: number, df2: number): number => (x <= 0 ? 1 : fTails(x, df1, df2)[1]);

/** P(F ≤ x). */
export const fCdf = (x: number, df1: number, df2: number): number => (x <= 0 ? 0 : fTails(x, df1, df2)[0]);

/** x with P(F ≤ x) = probability. */
export function fQuantile(probability: number, df1: number, df2: number): number {
	if (!(probability >= 0 && probability <= 1) || !(df1 > 0 && df2 > 0)) return NaN;
	const density = (x: number) => {
		const total = df1 * x + df2;
		return betaPrefactor(df1 / 2, df2 / 2, (df1 * x) / total, df2 / total) / x;
	};
	return positiveQuantile({ tails: (x) => fTails(x, df1, df2), density }, probability, 1 - probability, 1);
}

/** P(χ² ≤ x). */
export const chiSquareCdf = (x: number, dof: number): number => incompleteGamma(dof / 2, x / 2)[0];

/** P(χ² > x). */
export const chiSquareUpper = (x: number, dof: number): number => incompleteGamma(dof / 2, x / 2)[1];

/** x with P(χ² ≤ x) = probability. */
export function chiSquareQuantile(probability: number, dof: number): number {
	if (!(probability >= 0 && probability <= 1) || !(dof > 0)) return NaN;
	return positiveQuantile(
		{
			tails: (x) => incompleteGamma(dof / 2, x / 2),
			density: (x) => gammaPrefactor(dof / 2, x / 2) / x
		},
		probability,
		1 - probability,
		dof
	);
}

/** P(Z ≤ z). */
export function normalCdf(z: number): number {
	const [within, beyond] = incompleteGamma(0.5, (z * z) / 2);
	if (z === 0) return 0.5;
	return z < 0 ? beyond / 2 : 0.5 + within / 2;
}

/** z with P(Z ≤ z) = probability. */
export function normalQuantile(probability: number): number {
	if (!(probability >= 0 && probability <= 1)) return NaN;
	if (probability === 0.5) return 0;
	const tail = probability < 0.5 ? probability : 1 - probability;
	const square = positiveQuantile(
		{ tails: (x) => incompleteGamma(0.5, x / 2), density: (x) => gammaPrefactor(0.5, x / 2) / x },
		1 - 2 * tail,
		2 * tail,
		1
	);
	return probability < 0.5 ? -Math.sqrt(square) : Math.sqrt(square);
}
