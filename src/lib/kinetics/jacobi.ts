/**
 * One-sided Jacobi (Hestenes): plane rotations from the right make the given vectors orthogonal; their lengths are then the
 * singular values, each with a small relative error when the vectors are well conditioned apart from their scale.
 *
 *     ζ = (|b|² − |a|²) / (2 a·b),  t = sign ζ / (|ζ| + √(1 + ζ²)),  a ← c a − s b,  b ← s a + c b
 *
 * Source: J. Demmel and K. Veselić, SIAM J. Matrix Anal. Appl. 13 (1992) 1204, algorithm 4.1.
 */

const SWEEPS = 60;
/** |a·b| / (|a| |b|) below which two vectors count as orthogonal. */
const ORTHOGONAL = 1.2e-16;

/**
 * Rotates `vectors` in place until they are orthogonal.
 * @param companions rotated alongside (to gather the rotations), or null
 */
export function oneSidedJacobi(vectors: Float64Array[], companions: Float64Array[] | null): void {
	const count = vectors.length;
	for (let sweep = 0; sweep < SWEEPS; sweep++) {
		let rotated = false;
		for (let p = 0; p < count; p++)
			for (let q = p + 1; q < count; q++) {
				const tangent = rotation(vectors[p], vectors[q]);
				if (tangent === 0) continue;
				rotated = true;
				rotate(vectors[p], vectors[q], tangent);
				if (companions) rotate(companions[p], companions[q], tangent);
			}
		if (!rotated) return;
	}
}

/** Tangent of the rotation that makes a and b orthogonal; 0 when they are already. */
function rotation(a: Float64Array, b: Float64Array): number {
	let aa = 0;
	let bb = 0;
	let ab = 0;
	for (let i = 0; i < a.length; i++) {
		aa += a[i] * a[i];
		bb += b[i] * b[i];
		ab += a[i] * b[i];
	}
	if (ab === 0 || Math.abs(ab) <= ORTHOGONAL * Math.sqrt(aa) * Math.sqrt(bb)) return 0;
	const zeta = (bb - aa) / (2 * ab);
	if (!Number.isFinite(zeta)) return 0;
	return (zeta >= 0 ? 1 : -1) / (Math.abs(zeta) + hypotenuse(zeta));
}

function rotate(a: Float64Array, b: Float64Array, tangent: number): void {
	const cosine = 1 / hypotenuse(tangent);
	const sine = cosine * tangent;
	for (let i = 0; i < a.length; i++) {
		const value = a[i];
		a[i] = cosine * value - sine * b[i];
		b[i] = sine * value + cosine * b[i];
	}
}

/** √(1 + x²), without overflow; Math.hypot costs several times as much. */
function hypotenuse(x: number): number {
	return Math.abs(x) > 1e8 ? Math.abs(x) : Math.sqrt(1 + x * x);
}
