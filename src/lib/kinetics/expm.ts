/**
 * Exponential of any small real matrix.
 *
 * Problem: augmented and block matrices that are not rate matrices (Van Loan's blocks, Magnus steps) still need e^A. For rate
 * matrices themselves `propagator.ts` is more accurate.
 *
 *     e^A = (r(A / 2^s))^{2^s},  r = [13/13] Padé approximant, s so that ‖A‖₁ / 2^s ≤ 5.37
 *
 * after balancing A = D B D⁻¹ by powers of two (an A of very uneven rows would be scaled far too much otherwise). A triangular
 * A has its diagonal rebuilt exactly at each squaring.
 *
 * | symbol | name here |
 * | --- | --- |
 * | coefficients of r | `PADE` |
 * | s | `squarings` |
 *
 * Sources: N. J. Higham, SIAM J. Matrix Anal. Appl. 26 (2005) 1179, algorithm 2.3; A. H. Al-Mohy and N. J. Higham, SIAM J.
 * Matrix Anal. Appl. 31 (2009) 970 (triangular diagonals); B. N. Parlett and C. Reinsch, Numer. Math. 13 (1969) 293.
 */

const PADE = [
	64764752532480000, 32382376266240000, 7771770303897600, 1187353796428800, 129060195264000, 10559470521600,
	670442572800, 33522128640, 1323241920, 40840800, 960960, 16380, 182, 1
];
const LARGEST_NORM = 5.371920351148152;

/**
 * e^A for a row-major n × n matrix; a new array.
 * @throws RangeError when an entry is not finite or the result overflows.
 */
export function expm(a: ArrayLike<number>, n: number): Float64Array {
	const b = Float64Array.from(a);
	if (!b.every(Number.isFinite)) throw new RangeError('A matrix of finite numbers is expected.');
	const triangular = isTriangular(b, n);
	const scale = new Float64Array(n).fill(1);
	if (!triangular) balance(b, scale, n);
	const squarings = Math.max(0, Math.ceil(Math.log2(oneNorm(b, n) / LARGEST_NORM)));
	const diagonal = Float64Array.from({ length: n }, (_, i) => b[i * n + i]);
	for (let k = 0; k < b.length; k++) b[k] /= 2 ** squarings;
	let e: Float64Array = pade(b, n);
	for (let s = 1; s <= squarings; s++) {
		e = multiply(e, e, n);
		if (triangular) for (let i = 0; i < n; i++) e[i * n + i] = Math.exp(diagonal[i] / 2 ** (squarings - s));
	}
	for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) e[i * n + j] *= scale[i] / scale[j];
	if (!e.every(Number.isFinite))
		throw new RangeError('The exponential of this matrix is too large for a number.');
	return e;
}

function isTriangular(a: Float64Array, n: number): boolean {
	let upper = true;
	let lower = true;
	for (let i = 0; i < n; i++)
		for (let j = 0; j < n; j++) {
			if (i > j && a[i * n + j] !== 0) upper = false;
			if (i < j && a[i * n + j] !== 0) lower = false;
		}
	return upper || lower;
}

function balance(a: Float64Array, scale: Float64Array, n: number): void {
	for (let changed = true; changed;) {
		changed = false;
		for (let i = 0; i < n; i++) {
			let row = 0;
			let column = 0;
			for (let j = 0; j < n; j++) {
				if (j === i) continue;
				row += Math.abs(a[i * n + j]);
				column += Math.abs(a[j * n + i]);
			}
			if (row === 0 || column === 0) continue;
			const f = 2 ** Math.round(Math.log2(row / column) / 2);
			if (f === 1 || column * f + row / f >= 0.95 * (column + row)) continue;
			changed = true;
			scale[i] *= f;
			for (let j = 0; j < n; j++) {
				a[i * n + j] /= f;
				a[j * n + i] *= f;
			}
		}
	}
}

function oneNorm(a: Float64Array, n: number): number {
	let top = 0;
	for (let j = 0; j < n; j++) {
		let sum = 0;
		for (let i = 0; i < n; i++) sum += Math.abs(a[i * n + j]);
		top = Math.max(top, sum);
	}
	return top;
}

export function multiply(a: Float64Array, b: Float64Array, n: number): Float64Array {
	const c = new Float64Array(n * n);
	for (let i = 0; i < n; i++)
		for (let k = 0; k < n; k++) {
			const factor = a[i * n + k];
			if (factor === 0) continue;
			for (let j = 0; j < n; j++) c[i * n + j] += factor * b[k * n + j];
		}
	return c;
}

/** Σ c_k A^{2k}, k = 0…3, for powers {I, A², A⁴, A⁶}. */
function even(powers: Float64Array[], c: number[], n: number): Float64Array {
	const sum = new Float64Array(n * n);
	for (let i = 0; i < n; i++) sum[i * n + i] = c[0];
	for (let p = 1; p < c.length; p++) for (let k = 0; k < sum.length; k++) sum[k] += c[p] * powers[p - 1][k];
	return sum;
}

function pade(a: Float64Array, n: number): Float64Array {
	const a2 = multiply(a, a, n);
	const a4 = multiply(a2, a2, n);
	const a6 = multiply(a4, a2, n);
	const powers = [a2, a4, a6];
	const part = (first: number) => {
		const high = multiply(
			a6,
			even(powers, [0, PADE[first + 8], PADE[first + 10], PADE[first + 12] ?? 0], n),
			n
		);
		const low = even(powers, [PADE[first], PADE[first + 2], PADE[first + 4], PADE[first + 6]], n);
		return low.map((value, k) => value + high[k]);
	};
	const u = multiply(a, part(1), n);
	const v = part(0);
	return solveLinear(
		v.map((value, k) => value - u[k]),
		v.map((value, k) => value + u[k]),
		n
	);
}

/** Solves A X = B by elimination with partial pivoting; both are overwritten. */
export function solveLinear(a: Float64Array, b: Float64Array, n: number): Float64Array {
	const width = b.length / n;
	for (let c = 0; c < n; c++) {
		let pivot = c;
		for (let r = c + 1; r < n; r++) if (Math.abs(a[r * n + c]) > Math.abs(a[pivot * n + c])) pivot = r;
		swapRows(a, c, pivot, n);
		swapRows(b, c, pivot, width);
		for (let r = c + 1; r < n; r++) {
			const f = a[r * n + c] / a[c * n + c];
			if (f === 0) continue;
			for (let k = c; k < n; k++) a[r * n + k] -= f * a[c * n + k];
			for (let k = 0; k < width; k++) b[r * width + k] -= f * b[c * width + k];
		}
	}
	for (let r = n - 1; r >= 0; r--)
		for (let k = 0; k < width; k++) {
			let sum = b[r * width + k];
			for (let c = r + 1; c < n; c++) sum -= a[r * n + c] * b[c * width + k];
			b[r * width + k] = sum / a[r * n + r];
		}
	return b;
}

function swapRows(a: Float64Array, i: number, j: number, width: number): void {
	if (i === j) return;
	for (let k = 0; k < width; k++) [a[i * width + k], a[j * width + k]] = [a[j * width + k], a[i * width + k]];
}
