/**
 * Where a least-squares search stands at a point: gradient Jᵀr, column norms, the parameters that may move and the optimality.
 *
 * A parameter at a bound that the gradient pushes against is held (active set); optimality is the largest cosine between the
 * residuals and the column of a free one.
 */
import { norm } from './linear-algebra';
import type { LeastSquaresProblem, LeastSquaresWorkspace } from './least-squares';

export interface Bounds {
	lower: ArrayLike<number>;
	upper: ArrayLike<number>;
}

/** Fills `gradient`, `norms` and `free` of the workspace from its residuals and Jacobian number `current`. */
export function measureSlope(
	{ m, p }: LeastSquaresProblem,
	w: LeastSquaresWorkspace,
	current: number,
	ssr: number,
	bounds: Bounds
): { freeCount: number; optimality: number } {
	const r = w.residuals[current];
	const jac = w.jacobians[current];
	const size = Math.sqrt(ssr);
	let freeCount = 0;
	let optimality = 0;
	for (let j = 0; j < p; j++) {
		let dot = 0;
		for (let i = 0, c = j * m; i < m; i++) dot += jac[c + i] * r[i];
		w.gradient[j] = dot;
		const length = (w.norms[j] = norm(jac, j * m, m));
		if (held(w.x[j], j, dot, bounds)) continue;
		w.free[freeCount++] = j;
		if (length > 0 && size > 0) optimality = Math.max(optimality, Math.abs(dot) / (length * size));
	}
	return { freeCount, optimality };
}

function held(x: number, j: number, gradient: number, { lower, upper }: Bounds): boolean {
	if (lower[j] === upper[j]) return true;
	return (x <= lower[j] && gradient >= 0) || (x >= upper[j] && gradient <= 0);
}

/** −1 or +1 for a parameter that lies at its lower or upper bound, else 0; 0 too where equal bounds hold it. */
export const activeBoundsAt = (x: ArrayLike<number>, { lower, upper }: Bounds): Int8Array =>
	Int8Array.from(x, (v, j) => (lower[j] === upper[j] ? 0 : v <= lower[j] ? -1 : v >= upper[j] ? 1 : 0));
