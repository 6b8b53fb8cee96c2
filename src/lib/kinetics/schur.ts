/**
 * Complex Schur form of a small real matrix: A = D U T Uᴴ D⁻¹ with D a balancing diagonal, U unitary, T upper triangular.
 *
 * Problem: a component that is not in detailed balance (an irreversible loop) may have complex pairs of modes, and may be
 * defective. The Schur form exists always and U is perfectly conditioned; equal eigenvalues are then dealt with by the
 * confluent recursion on T, never by inverting eigenvectors.
 *
 * Steps: balancing by powers of two; complex QR iteration with Wilkinson's shift on the Hessenberg form, rotations gathered.
 * Numbers are kept as pairs of row-major arrays (real and imaginary parts).
 *
 * | symbol | name here |
 * | --- | --- |
 * | D, U, T | `SchurForm.scale`, `.u`, `.t` |
 *
 * Sources: B. N. Parlett and C. Reinsch, Numer. Math. 13 (1969) 293 (balancing); G. H. Golub and C. F. Van Loan, Matrix
 * Computations, 4th ed., 2013, ch. 7 (Hessenberg reduction, shifted QR).
 */
import { rotateColumns, rotateRows, rotationFor, type Rotation } from './plane-rotations';

export interface ComplexMatrix {
	m: number;
	re: Float64Array;
	im: Float64Array;
}

export interface SchurForm {
	scale: Float64Array;
	u: ComplexMatrix;
	t: ComplexMatrix;
	/** False when the iteration did not settle (not seen in practice); the result is then not to be used. */
	converged: boolean;
}

const ITERATIONS_PER_VALUE = 60;

/** @param a row-major m × m, not changed */
export function complexSchur(a: Float64Array, m: number): SchurForm {
	const scale = new Float64Array(m).fill(1);
	const h = balance(Float64Array.from(a), scale, m);
	const q = new Float64Array(m * m);
	for (let i = 0; i < m; i++) q[i * m + i] = 1;
	hessenberg(h, q, m);
	const t: ComplexMatrix = { m, re: h, im: new Float64Array(m * m) };
	const u: ComplexMatrix = { m, re: q, im: new Float64Array(m * m) };
	return { scale, u, t, converged: qrIterate(t, u) };
}

/** Scales rows and columns by powers of two until their sizes are alike; scale[i] multiplies row i of the vectors. */
function balance(a: Float64Array, scale: Float64Array, m: number): Float64Array {
	for (let changed = true; changed;) {
		changed = false;
		for (let i = 0; i < m; i++) {
			let row = 0;
			let column = 0;
			for (let j = 0; j < m; j++)
				if (j !== i) {
					row += Math.abs(a[i * m + j]);
					column += Math.abs(a[j * m + i]);
				}
			if (row === 0 || column === 0) continue;
			const f = 2 ** Math.round(Math.log2(row / column) / 2);
			if (f === 1 || column * f + row / f >= 0.95 * (column + row)) continue;
			changed = true;
			scale[i] *= f;
			for (let j = 0; j < m; j++) {
				a[i * m + j] /= f;
				a[j * m + i] *= f;
			}
		}
	}
	return a;
}

/** Householder reduction to Hessenberg form, gathered in q. */
function hessenberg(h: Float64Array, q: Float64Array, m: number): void {
	const v = new Float64Array(m);
	for (let k = 0; k + 2 < m; k++) {
		let size = 0;
		for (let i = k + 1; i < m; i++) size = Math.hypot(size, h[i * m + k]);
		if (size === 0) continue;
		const alpha = h[(k + 1) * m + k] > 0 ? -size : size;
		let square = 0;
		for (let i = k + 1; i < m; i++) {
			v[i] = h[i * m + k] - (i === k + 1 ? alpha : 0);
			square += v[i] * v[i];
		}
		if (square === 0) continue;
		reflectRows(h, v, k + 1, 2 / square, m);
		reflectColumns(h, v, k + 1, 2 / square, m);
		reflectColumns(q, v, k + 1, 2 / square, m);
		for (let i = k + 2; i < m; i++) h[i * m + k] = 0;
	}
}

function reflectRows(a: Float64Array, v: Float64Array, start: number, beta: number, m: number): void {
	for (let j = 0; j < m; j++) {
		let sum = 0;
		for (let i = start; i < m; i++) sum += v[i] * a[i * m + j];
		for (let i = start; i < m; i++) a[i * m + j] -= beta * sum * v[i];
	}
}

function reflectColumns(a: Float64Array, v: Float64Array, start: number, beta: number, m: number): void {
	for (let i = 0; i < m; i++) {
		let sum = 0;
		for (let j = start; j < m; j++) sum += v[j] * a[i * m + j];
		for (let j = start; j < m; j++) a[i * m + j] -= beta * sum * v[j];
	}
}

function qrIterate(t: ComplexMatrix, u: ComplexMatrix): boolean {
	const { m } = t;
	let end = m - 1;
	let tries = 0;
	while (end > 0) {
		const start = activeStart(t, end);
		if (start === end) {
			end--;
			tries = 0;
			continue;
		}
		if (++tries > ITERATIONS_PER_VALUE) return false;
		const [shiftRe, shiftIm] = tries % 12 === 0 ? exceptionalShift(t, end) : wilkinsonShift(t, end);
		qrStep(t, u, start, end, shiftRe, shiftIm);
	}
	return true;
}

function activeStart({ m, re, im }: ComplexMatrix, end: number): number {
	for (let k = end; k > 0; k--) {
		const below = Math.abs(re[k * m + k - 1]) + Math.abs(im[k * m + k - 1]);
		const here = Math.abs(re[k * m + k]) + Math.abs(im[k * m + k]);
		const before = Math.abs(re[(k - 1) * m + k - 1]) + Math.abs(im[(k - 1) * m + k - 1]);
		if (below <= 1.1e-16 * (here + before)) {
			re[k * m + k - 1] = im[k * m + k - 1] = 0;
			return k;
		}
	}
	return 0;
}

function exceptionalShift({ m, re, im }: ComplexMatrix, end: number): [number, number] {
	return [re[end * m + end] + Math.abs(re[end * m + end - 1]), im[end * m + end]];
}

/** The eigenvalue of the last 2 × 2 block that is nearer to its last entry. */
function wilkinsonShift({ m, re, im }: ComplexMatrix, end: number): [number, number] {
	const a = (end - 1) * m + end - 1;
	const d = end * m + end;
	const halfRe = (re[a] - re[d]) / 2;
	const halfIm = (im[a] - im[d]) / 2;
	const b = a + 1;
	const c = d - 1;
	const bcRe = re[b] * re[c] - im[b] * im[c];
	const bcIm = re[b] * im[c] + im[b] * re[c];
	const [rootRe, rootIm] = complexRoot(halfRe * halfRe - halfIm * halfIm + bcRe, 2 * halfRe * halfIm + bcIm);
	const sign = halfRe * rootRe + halfIm * rootIm >= 0 ? 1 : -1;
	const sumRe = halfRe + sign * rootRe;
	const sumIm = halfIm + sign * rootIm;
	const size = sumRe * sumRe + sumIm * sumIm;
	if (size === 0) return [re[d], im[d]];
	return [re[d] - (bcRe * sumRe + bcIm * sumIm) / size, im[d] - (bcIm * sumRe - bcRe * sumIm) / size];
}

function complexRoot(re: number, im: number): [number, number] {
	const size = Math.hypot(re, im);
	const root = Math.sqrt((size + Math.abs(re)) / 2);
	if (root === 0) return [0, 0];
	return re >= 0 ? [root, im / (2 * root)] : [Math.abs(im) / (2 * root), im >= 0 ? root : -root];
}

/** One explicitly shifted QR step on rows and columns start..end, by plane rotations. */
function qrStep(
	t: ComplexMatrix,
	u: ComplexMatrix,
	start: number,
	end: number,
	shiftRe: number,
	shiftIm: number
): void {
	const { m, re, im } = t;
	for (let k = start; k <= end; k++) {
		re[k * m + k] -= shiftRe;
		im[k * m + k] -= shiftIm;
	}
	const rotations: Rotation[] = [];
	for (let k = start; k < end; k++) {
		const r = rotationFor(t, k);
		rotations.push(r);
		rotateRows(t, k, r, k, m);
	}
	rotations.forEach((r, i) => {
		const k = start + i;
		rotateColumns(t, k, r, Math.min(k + 2, end + 1));
		rotateColumns(u, k, r, m);
	});
	for (let k = start; k <= end; k++) {
		re[k * m + k] += shiftRe;
		im[k * m + k] += shiftIm;
	}
}
