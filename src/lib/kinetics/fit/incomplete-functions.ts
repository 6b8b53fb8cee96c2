/**
 * Incomplete beta and gamma functions, both tails to double accuracy.
 *
 * They come as continued fractions or series. Their leading factors are written as binomial and Poisson densities through the
 * saddle-point expansion, which keeps its digits for thousands of degrees of freedom where logarithms of gamma functions would
 * cancel.
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
export function betaPrefactor(a: number, b: number, x: number, y: number): number {
	const n = a + b;
	const exponent =
		stirlingError(n) - stirlingError(a) - stirlingError(b) - deviance(a, n * x) - deviance(b, n * y);
	return Math.exp(exponent) * Math.sqrt((a * b) / (2 * Math.PI * n));
}

/** xᵃ e⁻ˣ / Γ(a). */
export function gammaPrefactor(a: number, x: number): number {
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
