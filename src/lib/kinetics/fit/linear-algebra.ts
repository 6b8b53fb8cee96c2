/**
 * Small dense linear algebra for least squares on typed arrays.
 *
 * Problem: factor a tall matrix A (m × n, n small) as A P = Q R without allocating, solve with R, and find the
 * singular values of R to high relative accuracy.
 *
 * Storage: column-major, A[j·m + i] is row i of column j, so that every inner loop runs along memory.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | A, R   | `a` (R overwrites the upper triangle of the first n rows) |
 * | diag R | `diagonal` |
 * | P      | `pivot`: column k of A P is column pivot[k] of A |
 * | Qᵀ b   | `b`, overwritten |
 *
 * Sources: Businger & Golub, Numer. Math. 7 (1965) 269 (Householder QR with column pivoting);
 * Demmel & Veselić, SIAM J. Matrix Anal. Appl. 13 (1992) 1204 (one-sided Jacobi).
 */

/** Euclidean norm of v[from .. from+length), free of overflow and underflow. */
export function norm(v: ArrayLike<number>, from = 0, length = v.length - from): number {
	let sum = 0;
	for (let i = from; i < from + length; i++) sum += v[i] * v[i];
	if (sum > 1e-280 && sum < 1e280) return Math.sqrt(sum);
	let largest = 0;
	for (let i = from; i < from + length; i++) largest = Math.max(largest, Math.abs(v[i]));
	if (largest === 0 || !Number.isFinite(largest)) return largest;
	sum = 0;
	for (let i = from; i < from + length; i++) sum += (v[i] / largest) ** 2;
	return largest * Math.sqrt(sum);
}

/** Whether every entry is a finite number. */
export const finite = (v: Float64Array): boolean => {
	for (let i = 0; i < v.length; i++) if (!Number.isFinite(v[i])) return false;
	return true;
};

function swapColumns(a: Float64Array, m: number, first: number, second: number): void {
	for (let i = 0; i < m; i++) {
		const t = a[first * m + i];
		a[first * m + i] = a[second * m + i];
		a[second * m + i] = t;
	}
}

/** Applies I − v vᵀ/v₀ (v in column k of `a`, from row k) to `target` from `offset + k`. */
export function reflect(a: Float64Array, m: number, k: number, target: Float64Array, offset: number): void {
	const column = k * m;
	const head = a[column + k];
	if (head === 0) return;
	let dot = 0;
	for (let i = k; i < m; i++) dot += a[column + i] * target[offset + i];
	dot /= -head;
	for (let i = k; i < m; i++) target[offset + i] += dot * a[column + i];
}

/**
 * Householder QR with column pivoting, in place.
 * @param a m × n, column-major; afterwards row i < j of column j holds R[i][j], and the reflectors fill the rest.
 * @param b length m, replaced by Qᵀ b.
 * @param diagonal length n, receives the diagonal of R.
 * @param pivot length n, receives the column order.
 * @param norms length 2n of scratch.
 * @param watch called before each column: a tall matrix takes long; it may throw to stop.
 */
export function pivotedQr(
	a: Float64Array,
	m: number,
	n: number,
	b: Float64Array,
	diagonal: Float64Array,
	pivot: Int32Array,
	norms: Float64Array,
	watch: (() => void) | null = null
): void {
	for (let j = 0; j < n; j++) {
		norms[j] = norms[n + j] = norm(a, j * m, m);
		pivot[j] = j;
	}
	const steps = Math.min(m, n);
	for (let k = 0; k < steps; k++) {
		watch?.();
		let best = k;
		for (let j = k + 1; j < n; j++) if (norms[j] > norms[best]) best = j;
		if (best !== k) {
			swapColumns(a, m, k, best);
			norms[best] = norms[k];
			norms[n + best] = norms[n + k];
			const p = pivot[k];
			pivot[k] = pivot[best];
			pivot[best] = p;
		}
		formReflector(a, m, k, diagonal);
		reflect(a, m, k, b, 0);
		for (let j = k + 1; j < n; j++) {
			reflect(a, m, k, a, j * m);
			downdateNorm(a, m, n, k, j, norms);
		}
	}
	for (let k = steps; k < n; k++) diagonal[k] = 0;
}

function formReflector(a: Float64Array, m: number, k: number, diagonal: Float64Array): void {
	const column = k * m;
	let length = norm(a, column + k, m - k);
	if (length !== 0) {
		if (a[column + k] < 0) length = -length;
		for (let i = k; i < m; i++) a[column + i] /= length;
		a[column + k] += 1;
	}
	diagonal[k] = -length;
}

/** The remaining norm of column j, recomputed where cancellation has eaten its digits. */
function downdateNorm(
	a: Float64Array,
	m: number,
	n: number,
	k: number,
	j: number,
	norms: Float64Array
): void {
	if (norms[j] === 0) return;
	const share = a[j * m + k] / norms[j];
	norms[j] *= Math.sqrt(Math.max(0, 1 - share * share));
	const relative = norms[j] / norms[n + j];
	if (0.05 * relative * relative <= 2.2e-16) {
		norms[j] = norms[n + j] = norm(a, j * m + k + 1, m - k - 1);
	}
}

/**
 * Copies R out of a factored matrix into a dense n × n column-major array (row order of the factor, columns pivoted).
 */
export function extractR(
	a: Float64Array,
	m: number,
	n: number,
	diagonal: Float64Array,
	r: Float64Array
): void {
	for (let j = 0; j < n; j++) {
		for (let i = 0; i < n; i++) r[j * n + i] = i < j && i < m ? a[j * m + i] : 0;
		r[j * n + j] = diagonal[j];
	}
}

/** Solves R x = b for the leading `rank` rows; the rest of x is zero. R is n × n column-major, x may be b. */
export function backSubstitute(
	r: Float64Array,
	n: number,
	rank: number,
	b: Float64Array,
	x: Float64Array
): void {
	for (let i = 0; i < n; i++) x[i] = i < rank ? b[i] : 0;
	for (let j = rank - 1; j >= 0; j--) {
		x[j] /= r[j * n + j];
		for (let i = 0; i < j; i++) x[i] -= r[j * n + i] * x[j];
	}
}

/** Solves Rᵀ x = b in place; R n × n column-major, upper triangular and non-singular. */
export function forwardSubstituteTransposed(r: Float64Array, n: number, x: Float64Array): void {
	for (let j = 0; j < n; j++) {
		let sum = x[j];
		for (let i = 0; i < j; i++) sum -= r[j * n + i] * x[i];
		x[j] = sum / r[j * n + j];
	}
}

/** Singular values (descending) and right singular vectors of a matrix; `v[j·n + i]` is component i of vector j. */
export interface SingularValues {
	values: Float64Array;
	vectors: Float64Array;
}

function rotatePair(u: Float64Array, v: Float64Array, m: number, n: number, p: number, q: number): boolean {
	let alpha = 0;
	let beta = 0;
	let gamma = 0;
	for (let i = 0; i < m; i++) {
		const x = u[p * m + i];
		const y = u[q * m + i];
		alpha += x * x;
		beta += y * y;
		gamma += x * y;
	}
	if (gamma === 0 || Math.abs(gamma) <= 1e-16 * Math.sqrt(alpha * beta)) return false;
	const zeta = (beta - alpha) / (2 * gamma);
	const t = (zeta < 0 ? -1 : 1) / (Math.abs(zeta) + Math.sqrt(1 + zeta * zeta));
	const c = 1 / Math.sqrt(1 + t * t);
	turn(u, m, p, q, c, c * t);
	turn(v, n, p, q, c, c * t);
	return true;
}

function turn(a: Float64Array, m: number, p: number, q: number, c: number, s: number): void {
	for (let i = 0; i < m; i++) {
		const x = a[p * m + i];
		const y = a[q * m + i];
		a[p * m + i] = c * x - s * y;
		a[q * m + i] = s * x + c * y;
	}
}

/**
 * Singular values and right singular vectors of an m × n column-major matrix by one-sided Jacobi.
 * @throws never; converges to rounding level within 60 sweeps for any finite input.
 */
export function singularValues(a: ArrayLike<number>, m: number, n: number): SingularValues {
	const u = Float64Array.from({ length: m * n }, (_, i) => a[i]);
	const v = new Float64Array(n * n);
	for (let j = 0; j < n; j++) v[j * n + j] = 1;
	for (let sweep = 0; sweep < 60; sweep++) {
		let turned = false;
		for (let p = 0; p < n - 1; p++)
			for (let q = p + 1; q < n; q++) if (rotatePair(u, v, m, n, p, q)) turned = true;
		if (!turned) break;
	}
	const sizes = Array.from({ length: n }, (_, j) => norm(u, j * m, m));
	const order = sizes.map((_, j) => j).sort((i, j) => sizes[j] - sizes[i]);
	const vectors = new Float64Array(n * n);
	order.forEach((from, to) => vectors.set(v.subarray(from * n, from * n + n), to * n));
	return { values: Float64Array.from(order, (j) => sizes[j]), vectors };
}
