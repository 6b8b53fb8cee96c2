/**
 * The determinant criterion for responses whose errors go together: minimise |ZᵀZ| over complete rows.
 *
 *     f(x) = ln |S|,  S = (Z U)ᵀ(Z U),  Z_ui = prediction − observation of response i in row u
 *     ∂f/∂x_j = 2 Σ Q∘D_j,   Q = Z U L⁻ᵀ,  D_j = (∂Z/∂x_j) U L⁻ᵀ,  S = L Lᵀ
 *     ∂²f/∂x_j∂x_k ≈ 2 Σ D_j∘D_k − tr(A_j A_k),   A_j = Qᵀ D_j + D_jᵀ Q      (second derivatives of Z left out)
 *
 * The errors of a row are taken as normal with one unknown covariance for all rows; the most likely constants then minimise |ZᵀZ|,
 * whatever the units of the responses. U holds the combinations of responses that are independent (`dependencies.ts`).
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | Z U, Q | `z`, `q` (row by row) |
 * | D_j | `d[j]` |
 *
 * Sources: Box & Draper, Biometrika 52 (1965) 355; Bates & Watts (1988) 4.1–4.3 and Technometrics 29 (1987) 149 (generalised
 * Gauss–Newton step).
 */
import type { KineticModel } from './model';
import { cholesky } from './positive-definite';

export interface CriterionPoint {
	/** ln |S|; Infinity where the model cannot be evaluated or S is singular. */
	value: number;
	gradient: Float64Array;
	/** Gauss–Newton approximation of the second derivatives, p × p. */
	hessian: number[][];
	/** √(2 Σ D_j²): how sharply each parameter acts, to scale steps. */
	scale: Float64Array;
}

export class DeterminantCriterion {
	evaluations = 0;
	private readonly predictions: Float64Array;
	private readonly jacobian: Float64Array;

	/**
	 * @param rows positions of the points of each complete row
	 * @param independent orthonormal combinations of the responses
	 */
	constructor(
		private readonly model: KineticModel,
		private readonly rows: number[][],
		private readonly independent: number[][]
	) {
		this.predictions = new Float64Array(model.m);
		this.jacobian = new Float64Array(model.m * model.p);
	}

	at(x: Float64Array): CriterionPoint {
		const { model, predictions, jacobian } = this;
		const { p, m, points } = model;
		const nowhere = {
			value: Infinity,
			gradient: new Float64Array(p),
			hessian: [],
			scale: new Float64Array(p)
		};
		this.evaluations++;
		if (!model.evaluatePredictions(x, predictions, jacobian)) return nowhere;
		const z = this.combined((i) => predictions[i] - points[i].observed);
		const factor = cholesky(crossProduct(z, z));
		if (!factor) return nowhere;
		const value = 2 * factor.reduce((sum, row, i) => sum + Math.log(row[i]), 0);
		if (!Number.isFinite(value)) return nowhere;
		const q = z.map((row) => whitened(row, factor));
		const d = Array.from({ length: p }, (_, j) =>
			this.combined((i) => jacobian[j * m + i]).map((row) => whitened(row, factor))
		);
		const gradient = Float64Array.from(d, (dj) => 2 * inner(q, dj));
		const a = d.map((dj) => symmetricPart(crossProduct(q, dj)));
		const hessian = d.map((dj, j) => d.map((dk, k) => 2 * inner(dj, dk) - inner(a[j], a[k])));
		return { value, gradient, hessian, scale: Float64Array.from(d, (dj) => Math.sqrt(2 * inner(dj, dj))) };
	}

	/** (entry of every point) U, row by row. */
	private combined(entry: (point: number) => number): number[][] {
		return this.rows.map((row) =>
			this.independent.map((u) => row.reduce((sum, point, i) => sum + u[i] * entry(point), 0))
		);
	}
}

/** Solves L y = row. */
function whitened(row: number[], factor: number[][]): number[] {
	const y = row.slice();
	for (let i = 0; i < y.length; i++) {
		for (let k = 0; k < i; k++) y[i] -= factor[i][k] * y[k];
		y[i] /= factor[i][i];
	}
	return y;
}

export function crossProduct(a: number[][], b: number[][]): number[][] {
	const out = Array.from({ length: a[0].length }, () => new Array<number>(b[0].length).fill(0));
	for (let u = 0; u < a.length; u++)
		for (let i = 0; i < out.length; i++)
			for (let j = 0; j < out[i].length; j++) out[i][j] += a[u][i] * b[u][j];
	return out;
}

/** Σ of the products of all entries. For symmetric matrices tr(A B). */
function inner(a: number[][], b: number[][]): number {
	let sum = 0;
	for (let u = 0; u < a.length; u++) for (let i = 0; i < a[u].length; i++) sum += a[u][i] * b[u][i];
	return sum;
}

/** A + Aᵀ. */
const symmetricPart = (a: number[][]): number[][] => a.map((row, i) => row.map((v, j) => v + a[j][i]));
