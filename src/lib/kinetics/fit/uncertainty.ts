/**
 * Covariance of the estimates at an optimum, without the parameters that a bound holds.
 */
import { covarianceFromJacobian, type Spread } from './covariance';
import { cholesky, invertPositiveDefinite } from './positive-definite';
import type { KineticProblem } from './problem';

export interface Uncertainty {
	/** Over the active parameters, for s = 1. */
	spread: Spread;
	/** Positions of the estimated parameters that are free at the optimum. */
	active: number[];
	/** Residual standard deviation; null without degrees of freedom. */
	s: number | null;
	degreesOfFreedom: number;
	/** p × p over all estimated parameters on the scale of estimation, s² included; zero rows for those at a bound. */
	covariance: number[][];
	/** Standard errors on the scale of estimation; NaN at a bound or without s, Infinity where not determined. */
	errors: number[];
}

/** What an optimum has to give: sum of squares, Jacobian and which bounds hold. */
export interface Optimum {
	ssr: number;
	jacobian: Float64Array;
	activeBounds: ArrayLike<number>;
}

export function uncertainty(problem: KineticProblem, best: Optimum): Uncertainty {
	const m = problem.points.length;
	const p = problem.free.length;
	const active = Array.from({ length: p }, (_, j) => j).filter((j) => best.activeBounds[j] === 0);
	const spread = covarianceFromJacobian(activeJacobian(best.jacobian, active, m), m, active.length);
	const degreesOfFreedom = problem.counted - p;
	const s = degreesOfFreedom > 0 ? Math.sqrt(best.ssr / degreesOfFreedom) : null;
	const covariance = Array.from({ length: p }, () => new Array<number>(p).fill(0));
	const errors = new Array<number>(p).fill(NaN);
	active.forEach((j, a) => {
		errors[j] = spread.errors[a] * (s ?? NaN);
		active.forEach((k, b) => (covariance[j][k] = spread.covariance[a][b] * (s === null ? 0 : s * s)));
	});
	return { spread, active, s, degreesOfFreedom, covariance, errors };
}

/**
 * The same from a covariance that was found otherwise (s counts as one); without errors where it is null.
 * @param covariance over the active parameters
 */
export function uncertaintyFromCovariance(
	covariance: number[][] | null,
	active: number[],
	p: number,
	degreesOfFreedom: number
): Uncertainty {
	const k = active.length;
	const information = covariance && invertPositiveDefinite(covariance);
	const factor = information && cholesky(information);
	// Rows of Lᵀ stand in for a Jacobian: (L Lᵀ)⁻¹ is the covariance.
	const rows = new Float64Array(k * k);
	factor?.forEach((row, i) => row.forEach((v, j) => (rows[i * k + j] = v)));
	const full = Array.from({ length: p }, () => new Array<number>(p).fill(0));
	const errors = new Array<number>(p).fill(NaN);
	active.forEach((j, a) => {
		errors[j] = covariance ? Math.sqrt(covariance[a][a]) : NaN;
		active.forEach((i, b) => (full[j][i] = covariance?.[a][b] ?? 0));
	});
	return {
		spread: covarianceFromJacobian(rows, k, k),
		active,
		s: factor ? 1 : null,
		degreesOfFreedom,
		covariance: full,
		errors
	};
}

/** The columns of the active parameters. */
export function activeJacobian(jacobian: Float64Array, active: number[], m: number): Float64Array {
	const out = new Float64Array(m * active.length);
	active.forEach((j, k) => out.set(jacobian.subarray(j * m, (j + 1) * m), k * m));
	return out;
}
