/**
 * Minimises the determinant criterion within bounds: damped Newton steps, far off with the Gauss–Newton approximation of the second
 * derivatives, near the end with second derivatives from differences of the exact gradient.
 *
 *     (H + μ D²) step = −g,   D = diag(scale), μ raised until the matrix is positive definite and the criterion falls
 *     ∂²f/∂x_j∂x_k from g(x ± h e_j), g(x ± 2h e_j), h_j a thousandth of 1/scale_j: error of order h⁴
 *
 * Sources: Bates & Watts (1988) 4.3; Nocedal & Wright, Numerical Optimization (2006) 3.4 and 8.1.
 */
import type { CriterionPoint, DeterminantCriterion } from './determinant';
import { cholesky } from './positive-definite';
import { activeBoundsAt, type Bounds } from './slope';

export interface DeterminantMinimum {
	x: Float64Array;
	value: number;
	converged: boolean;
	/** Largest |gradient|/scale over the parameters that may move. */
	optimality: number;
	activeBounds: Int8Array;
}

const CLOSE = 1e-3;
const DONE = 1e-11;

/** Follows the criterion down from a start. */
export function minimiseDeterminant(
	criterion: DeterminantCriterion,
	start: ArrayLike<number>,
	bounds: Bounds,
	maxSteps = 80
): DeterminantMinimum {
	let x: Float64Array = Float64Array.from(start, (v, j) =>
		Math.min(Math.max(v, bounds.lower[j]), bounds.upper[j])
	);
	let point = criterion.at(x);
	let mu = 1e-2;
	let converged = false;
	for (let step = 0; step < maxSteps && point.value < Infinity; step++) {
		const free = freeOf(x, point, bounds);
		const off = optimality(point, free);
		if (off <= DONE || free.length === 0) {
			converged = true;
			break;
		}
		const near = off < CLOSE;
		const hessian = near ? exactHessian(criterion, x, point.scale, free) : pick(point.hessian, free);
		const next = descend(criterion, { x, point, hessian, free, bounds, mu: near ? 0 : mu });
		if (!next) {
			// No step leads down any more: as far as the digits of the criterion go.
			converged = off < CLOSE;
			break;
		}
		({ x, point } = next);
		mu = Math.max(next.mu * 0.1, 1e-12);
	}
	const free = freeOf(x, point, bounds);
	return {
		x,
		value: point.value,
		converged,
		optimality: optimality(point, free),
		activeBounds: activeBoundsAt(x, bounds)
	};
}

interface Position {
	x: Float64Array;
	point: CriterionPoint;
	hessian: number[][];
	free: number[];
	bounds: Bounds;
	mu: number;
}

function descend(
	criterion: DeterminantCriterion,
	{ x, point, hessian, free, bounds, mu }: Position
): { x: Float64Array; point: CriterionPoint; mu: number } | null {
	for (let k = 0; k < 40; k++) {
		const step = dampedStep(hessian, point, free, mu);
		if (step) {
			const trial = x.slice();
			free.forEach((j, a) => {
				trial[j] = Math.min(Math.max(x[j] + step[a], bounds.lower[j]), bounds.upper[j]);
			});
			if (trial.every((v, j) => v === x[j])) return null;
			const next = criterion.at(trial);
			const falls = next.value < point.value;
			// At the last digits of the value the gradient still tells which of two points is the better one.
			const level = next.value <= point.value + 1e-13 * Math.max(1, Math.abs(point.value));
			if (falls || (level && optimality(next, free) < 0.5 * optimality(point, free)))
				return { x: trial, point: next, mu };
		}
		mu = mu === 0 ? 1e-4 : mu * 10;
	}
	return null;
}

function dampedStep(
	hessian: number[][],
	{ gradient, scale }: CriterionPoint,
	free: number[],
	mu: number
): number[] | null {
	const matrix = hessian.map((row, a) =>
		row.map((v, b) => v + (a === b ? mu * (scale[free[a]] ** 2 || 1) : 0))
	);
	const l = cholesky(matrix);
	if (!l) return null;
	const n = free.length;
	const y = free.map((j) => -gradient[j]);
	for (let i = 0; i < n; i++) {
		for (let k = 0; k < i; k++) y[i] -= l[i][k] * y[k];
		y[i] /= l[i][i];
	}
	for (let i = n - 1; i >= 0; i--) {
		for (let k = i + 1; k < n; k++) y[i] -= l[k][i] * y[k];
		y[i] /= l[i][i];
	}
	return y;
}

function freeOf(x: Float64Array, { gradient }: CriterionPoint, { lower, upper }: Bounds): number[] {
	return Array.from(x.keys()).filter(
		(j) =>
			lower[j] !== upper[j] &&
			!(x[j] <= lower[j] && gradient[j] >= 0) &&
			!(x[j] >= upper[j] && gradient[j] <= 0)
	);
}

const optimality = ({ gradient, scale }: CriterionPoint, free: number[]): number =>
	free.reduce((worst, j) => Math.max(worst, scale[j] > 0 ? Math.abs(gradient[j]) / scale[j] : 0), 0);

const pick = (matrix: number[][], free: number[]): number[][] =>
	free.map((j) => free.map((k) => matrix[j][k]));

/** Second derivatives over the free parameters, symmetrised. */
export function exactHessian(
	criterion: DeterminantCriterion,
	x: Float64Array,
	scale: ArrayLike<number>,
	free: number[]
): number[][] {
	const rows = free.map((j) => {
		const h = 1e-3 / (scale[j] || 1);
		const at = (share: number) => {
			const moved = x.slice();
			moved[j] += share * h;
			return criterion.at(moved).gradient;
		};
		const [a, b, c, d] = [at(1), at(-1), at(2), at(-2)];
		return free.map((k) => (8 * (a[k] - b[k]) - (c[k] - d[k])) / (12 * h));
	});
	return rows.map((row, a) => row.map((v, b) => 0.5 * (v + rows[b][a])));
}
