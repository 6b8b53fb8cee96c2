/**
 * Normal, Student t, F and chi-square distributions: tail areas and quantiles to double accuracy.
 *
 * Tail areas come from the incomplete beta and gamma functions as continued fractions or series. Their leading factors are
 * written as binomial and Poisson densities through the saddle-point expansion, which keeps its digits for thousands of
 * degrees of freedom where logarithms of gamma functions would cancel. Quantiles are found on ln x by Newton steps on the
 * logarithm of the smaller tail, kept inside a bracket.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | I_x(a, b) | `incompleteBeta` |
 * | P(a, x), Q(a, x) | `incompleteGamma` |
 * | δ(n), D₀ | `stirlingError`, `deviance` |
 *
 * Sources: Loader, "Fast and accurate computation of binomial probabilities" (2000) for the densities; Abramowitz & Stegun,
 * Handbook of Mathematical Functions (1964) 6.1.41, 6.5.29, 6.5.31, 26.5.8; modified Lentz evaluation, Thompson & Barnett,
 * J. Comput. Phys. 64 (1986) 490.
 */

const EPS = 1e-17;
const TINY = 1e-300;
const LN_SQRT_2PI = 0.9189385332046727;

/** δ(n) = ln n! − ln(√(2πn) (n/e)ⁿ) for n > 0, not only whole. */
function stirlingError(n: number): number {
	if (n < 12) {
		let z = n;
		// ln Γ(n+1) = ln Γ(z+1) − Σ ln(k): climb to where the asymptotic series has all its digits.
		let product = 1;
		while (z < 12) {
			z += 1;
			product *= z;
		}
		const lnFactorial = stirlingError(z) + (z + 0.5) * Math.log(z) - z + LN_SQRT_2PI - Math.log(product);
		return lnFactorial - ((n + 0.5) * Math.log(n) - n + LN_SQRT_2PI);
	}
	const r = 1 / (n * n);
	const series =
		1 / 12 -
		r * (1 / 360 - r * (1 / 1260 - r * (1 / 1680 - r * (1 / 1188 - r * (691 / 360360 - r * (1 / 156))))));
	return series / n;
}

/** D₀(x, m) = x ln(x/m) + m − x, without cancellation for x near m. */
function deviance(x: number, m: number): number {
	if (Math.abs(x - m) < 0.1 * (x + m)) {
		const v = (x - m) / (x + m);
		let sum = (x - m) * v;
		let term = 2 * x * v;
		for (let j = 1; j < 1000; j++) {
			term *= v * v;
			const next = sum + term / (2 * j + 1);
			if (next === sum) return next;
			sum = next;
		}
	}
	return x * Math.log(x / m) + m - x;
}

/** xᵃ (1−x)ᵇ / B(a, b), with y = 1 − x given apart. */
function betaPrefactor(a: number, b: number, x: number, y: number): number {
	const n = a + b;
	const exponent =
		stirlingError(n) - stirlingError(a) - stirlingError(b) - deviance(a, n * x) - deviance(b, n * y);
	return Math.exp(exponent) * Math.sqrt((a * b) / (2 * Math.PI * n));
}

/** xᵃ e⁻ˣ / Γ(a). */
function gammaPrefactor(a: number, x: number): number {
	return Math.exp(-stirlingError(a) - deviance(a, x)) * Math.sqrt(a / (2 * Math.PI));
}

/** 1/(b₀ + a₁/(b₁ + …)) style evaluation by the modified Lentz method; `next` gives aₖ and bₖ for k ≥ 1. */
function lentz(b0: number, next: (k: number) => readonly [number, number]): number {
	let f = b0 || TINY;
	let c = f;
	let d = 0;
	for (let k = 1; k < 20000; k++) {
		const [a, b] = next(k);
		d = b + a * d || TINY;
		c = b + a / c || TINY;
		d = 1 / d;
		const change = c * d;
		f *= change;
		if (Math.abs(change - 1) < 2e-16) break;
	}
	return f;
}

function betaFraction(a: number, b: number, x: number): number {
	const fraction = lentz(1, (k) => {
		const m = k >> 1;
		const numerator =
			k % 2 === 0
				? (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m))
				: (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1));
		return [numerator, 1];
	});
	return 1 / (a * fraction);
}

/**
 * Both tails of the regularised incomplete beta function: [I_x(a,b), 1 − I_x(a,b)], each to full relative accuracy.
 * `y` is 1 − x, given apart so that x near 1 keeps its digits.
 */
export function incompleteBeta(a: number, b: number, x: number, y = 1 - x): [number, number] {
	if (!(a > 0 && b > 0) || Number.isNaN(x)) return [NaN, NaN];
	if (x <= 0) return [0, 1];
	if (y <= 0) return [1, 0];
	const factor = betaPrefactor(a, b, x, y);
	if (x <= (a + 1) / (a + b + 2)) {
		const lower = factor * betaFraction(a, b, x);
		return [lower, 1 - lower];
	}
	const upper = factor * betaFraction(b, a, y);
	return [1 - upper, upper];
}

/** Both tails of the regularised incomplete gamma function: [P(a,x), Q(a,x)]. */
export function incompleteGamma(a: number, x: number): [number, number] {
	if (!(a > 0) || Number.isNaN(x)) return [NaN, NaN];
	if (x <= 0) return [0, 1];
	if (x === Infinity) return [1, 0];
	const factor = gammaPrefactor(a, x);
	if (x < a + 1) {
		let term = 1 / a;
		let sum = term;
		for (let k = 1; k < 100000 && term > EPS * sum; k++) {
			term *= x / (a + k);
			sum += term;
		}
		return [factor * sum, 1 - factor * sum];
	}
	const fraction = lentz(x + 1 - a, (k) => [-k * (k - a), x + 2 * k + 1 - a]);
	return [1 - factor / fraction, factor / fraction];
}

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
