/**
 * Plane rotations of a complex matrix, for QR iteration (`schur.ts`).
 *
 *     G = [c, s; −s̄, c],  c real,  so that G (a, b)ᵀ = (r, 0)ᵀ:  c = |a|/√(|a|² + b²),  s = (a/|a|) b̄/√(|a|² + b²)
 *
 * | symbol | name here |
 * | --- | --- |
 * | c, s | `Rotation` |
 * | G A on rows k, k + 1; A Gᴴ on columns k, k + 1 | `rotateRows`, `rotateColumns` |
 *
 * Source: W. Givens, J. SIAM 6 (1958) 26; G. H. Golub and C. F. Van Loan, Matrix Computations, 4th ed., 2013, section 5.1.
 */
import type { ComplexMatrix } from './schur';

/** [c, s; −s̄, c] with c real. */
export interface Rotation {
	c: number;
	sRe: number;
	sIm: number;
}

export function rotationFor({ m, re, im }: ComplexMatrix, k: number): Rotation {
	const a = k * m + k;
	const b = (k + 1) * m + k;
	const sizeA = Math.hypot(re[a], im[a]);
	const size = Math.hypot(sizeA, re[b], im[b]);
	if (size === 0) return { c: 1, sRe: 0, sIm: 0 };
	if (sizeA === 0) return { c: 0, sRe: re[b] / size, sIm: -im[b] / size };
	const phaseRe = re[a] / sizeA;
	const phaseIm = im[a] / sizeA;
	return {
		c: sizeA / size,
		sRe: (phaseRe * re[b] + phaseIm * im[b]) / size,
		sIm: (phaseIm * re[b] - phaseRe * im[b]) / size
	};
}

export function rotateRows(
	{ m, re, im }: ComplexMatrix,
	k: number,
	{ c, sRe, sIm }: Rotation,
	from: number,
	to: number
): void {
	for (let j = from; j < to; j++) {
		const a = k * m + j;
		const b = a + m;
		const aRe = re[a];
		const aIm = im[a];
		re[a] = c * aRe + sRe * re[b] - sIm * im[b];
		im[a] = c * aIm + sRe * im[b] + sIm * re[b];
		re[b] = c * re[b] - sRe * aRe - sIm * aIm;
		im[b] = c * im[b] - sRe * aIm + sIm * aRe;
	}
}

/** Multiplies from the right by the conjugate transpose of the rotation, on the first `rows` rows. */
export function rotateColumns(
	{ m, re, im }: ComplexMatrix,
	k: number,
	{ c, sRe, sIm }: Rotation,
	rows: number
): void {
	for (let i = 0; i < rows; i++) {
		const a = i * m + k;
		const b = a + 1;
		const aRe = re[a];
		const aIm = im[a];
		re[a] = c * aRe + sRe * re[b] + sIm * im[b];
		im[a] = c * aIm + sRe * im[b] - sIm * re[b];
		re[b] = c * re[b] - sRe * aRe + sIm * aIm;
		im[b] = c * im[b] - sRe * aIm - sIm * aRe;
	}
}
