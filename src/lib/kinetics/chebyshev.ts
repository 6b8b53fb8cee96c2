/**
 * Polynomials of degree 20 in Chebyshev form: interpolation, evaluation, derivative, and the change to Bernstein form.
 *
 *     p(x) = Σ_k a_k T_k(x) on [−1, 1],   a_k = (2/N) Σ''_j p(x_j) cos(jkπ/N),   x_j = cos(jπ/N)
 *     p(x) = Σ_i b_i C(N,i) u^i (1−u)^{N−i},   u = (1 + x)/2
 *
 * Interpolation at Chebyshev points is stable, and for e^{−λt} on an interval [l, 2l] its error is below 4e-16 of the value
 * at t = 0 whatever λ ≥ 0: the Bernstein ellipse through 0 has ρ = 3 + √8, on it |e^{−λz}| ≤ 1, and
 * 4 ρ^{−N}/(ρ−1) < 4e-16 for N = 20. The Bernstein form bounds the polynomial and counts its zeros (Descartes' rule); the
 * change of basis loses little because the a_k fall off as ρ^{−k}.
 *
 * | symbol | name here |
 * | --- | --- |
 * | N | `DEGREE` |
 * | x_j | `NODES[j]` |
 * | a_k, b_i | arrays of length `DEGREE + 1` |
 *
 * Sources: L. N. Trefethen, Approximation Theory and Approximation Practice (2013), theorem 8.2; C. W. Clenshaw, Math. Tables
 * Aids Comput. 9 (1955) 118; T_k in Bernstein form: A. Rababah, Comput. Methods Appl. Math. 3 (2003) 608.
 */

export const DEGREE = 20;
export const SIZE = DEGREE + 1;

/** Chebyshev points of the second kind, from 1 down to −1, exactly symmetric. */
export const NODES = Float64Array.from({ length: SIZE }, (_, j) =>
	Math.sin((Math.PI * (DEGREE - 2 * j)) / (2 * DEGREE))
);

/** TO_COEFFICIENTS[k·SIZE + j]: weight of the value at NODES[j] in a_k. */
const TO_COEFFICIENTS = interpolationWeights();
/** TO_BERNSTEIN[i·SIZE + k]: weight of a_k in b_i. */
const TO_BERNSTEIN = bernsteinWeights();

function interpolationWeights(): Float64Array {
	const weights = new Float64Array(SIZE * SIZE);
	for (let k = 0; k < SIZE; k++)
		for (let j = 0; j < SIZE; j++) {
			const ends = (j === 0 || j === DEGREE ? 0.5 : 1) * (k === 0 || k === DEGREE ? 0.5 : 1);
			const angle = (j * k) % (2 * DEGREE);
			weights[k * SIZE + j] = ((2 * ends) / DEGREE) * Math.cos((Math.PI * angle) / DEGREE);
		}
	return weights;
}

function bernsteinWeights(): Float64Array {
	const weights = new Float64Array(SIZE * SIZE);
	for (let k = 0; k < SIZE; k++) {
		let b = Array.from({ length: k + 1 }, (_, j) => chebyshevInBernstein(k, j));
		for (let degree = k; degree < DEGREE; degree++) b = elevated(b);
		for (let i = 0; i < SIZE; i++) weights[i * SIZE + k] = b[i];
	}
	return weights;
}

function chebyshevInBernstein(k: number, j: number): number {
	return ((k - j) % 2 === 0 ? 1 : -1) * (choose(2 * k, 2 * j) / choose(k, j));
}

function choose(n: number, k: number): number {
	let result = 1;
	for (let i = 1; i <= k; i++) result = (result * (n - k + i)) / i;
	return result;
}

function elevated(b: number[]): number[] {
	const n = b.length;
	return Array.from({ length: n + 1 }, (_, i) => (i / n) * (b[i - 1] ?? 0) + (1 - i / n) * (b[i] ?? 0));
}

/**
 * Coefficients of the interpolant.
 * @param values at NODES, `stride` apart from `offset` on
 * @param out length SIZE from `at` on
 */
export function coefficients(
	values: Float64Array,
	offset: number,
	stride: number,
	out: Float64Array,
	at: number
): void {
	for (let k = 0; k < SIZE; k++) {
		let sum = 0;
		for (let j = 0, w = k * SIZE, v = offset; j < SIZE; j++, w++, v += stride)
			sum += TO_COEFFICIENTS[w] * values[v];
		out[at + k] = sum;
	}
}

/** p(x) by Clenshaw's recurrence; `a` has SIZE coefficients from `at` on. */
export function clenshaw(a: Float64Array, x: number, at = 0): number {
	let b1 = 0;
	let b2 = 0;
	const twice = 2 * x;
	for (let k = DEGREE; k > 0; k--) {
		const b0 = twice * b1 - b2 + a[at + k];
		b2 = b1;
		b1 = b0;
	}
	return x * b1 - b2 + a[at];
}

/** Coefficients of dp/dx, written into `out` (may not be `a`). */
export function derivative(a: Float64Array, out: Float64Array): Float64Array {
	out[DEGREE] = 0;
	out[DEGREE - 1] = 2 * DEGREE * a[DEGREE];
	for (let k = DEGREE - 1; k > 0; k--) out[k - 1] = (out[k + 1] ?? 0) + 2 * k * a[k];
	out[0] /= 2;
	return out;
}

/** Bernstein coefficients on [−1, 1] of a polynomial in Chebyshev form. */
export function bernstein(a: Float64Array, out: Float64Array): Float64Array {
	for (let i = 0; i < SIZE; i++) {
		let sum = 0;
		for (let k = 0, w = i * SIZE; k < SIZE; k++, w++) sum += TO_BERNSTEIN[w] * a[k];
		out[i] = sum;
	}
	return out;
}
