/**
 * Uncertainty of a least-squares fit from its Jacobian, in units where s = 1.
 *
 *     covariance = (JᵀJ)⁻¹,  error_j = √covariance_jj,  leverage_i = ‖row i of Q‖²
 *
 * J's columns are scaled to length one before anything is computed, so that a rate constant in 1/s and an energy in J/mol do
 * not spoil each other. Directions whose singular value is below 1e-10 of the largest are flat: the errors of every
 * parameter that takes part in one are infinite, and no number is made up for them.
 *
 * Source: Bates & Watts, Nonlinear Regression Analysis and Its Applications (1988), 2.1; Golub & Van Loan, Matrix
 * Computations, 5.5 (rank by singular values).
 */
import { norm, pivotedQr, singularValues } from './linear-algebra';

export interface Spread {
	/** p × p, for s = 1; very large, but finite, along directions that the data do not determine. */
	covariance: number[][];
	/** Standard errors for s = 1; Infinity for a parameter that takes part in a flat direction. */
	errors: number[];
	correlation: number[][];
	/** Singular values of the Jacobian with columns scaled to one, largest first. */
	singularValues: number[];
	/** Right singular vectors of the scaled Jacobian, in the same order. */
	directions: number[][];
	/** Lengths of the Jacobian's columns. */
	columnNorms: number[];
	/** Number of directions that the data determine. */
	rank: number;
}

const FLAT = 1e-10;

/** @param jacobian m × p, column-major. */
export function covarianceFromJacobian(jacobian: Float64Array, m: number, p: number): Spread {
	const columnNorms = Array.from({ length: p }, (_, j) => norm(jacobian, j * m, m));
	const scaled = jacobian.slice(0, m * p);
	for (let j = 0; j < p; j++) {
		const length = columnNorms[j] || 1;
		for (let i = 0; i < m; i++) scaled[j * m + i] /= length;
	}
	const { values, vectors } = triangleSingularValues(scaled, m, p);
	const largest = values[0] || 1;
	let rank = 0;
	while (rank < p && values[rank] > FLAT * largest) rank++;
	const covariance = assemble(values, vectors, columnNorms, p);
	const flat = flatMembers(vectors, rank, p);
	const errors = covariance.map((row, j) => (flat[j] ? Infinity : Math.sqrt(row[j])));
	const correlation = covariance.map((row, i) =>
		row.map((c, j) => (i === j ? 1 : c / Math.sqrt(covariance[i][i] * covariance[j][j])))
	);
	return {
		covariance,
		errors,
		correlation,
		singularValues: Array.from(values),
		directions: Array.from({ length: p }, (_, k) => Array.from(vectors.subarray(k * p, k * p + p))),
		columnNorms,
		rank
	};
}

/** Singular values of the scaled Jacobian by way of its triangle, which is small. */
function triangleSingularValues(scaled: Float64Array, m: number, p: number) {
	if (m < p) return singularValues(scaled, m, p);
	const pivot = new Int32Array(p);
	const diagonal = new Float64Array(p);
	const factored = scaled.slice();
	pivotedQr(factored, m, p, new Float64Array(m), diagonal, pivot, new Float64Array(2 * p));
	const triangle = new Float64Array(p * p);
	for (let k = 0; k < p; k++) {
		const column = pivot[k] * p;
		for (let i = 0; i < k; i++) triangle[column + i] = factored[k * m + i];
		triangle[column + k] = diagonal[k];
	}
	return singularValues(triangle, p, p);
}

/**
 * V S⁻² Vᵀ in the parameters' own units. A flat direction takes the smallest singular value that counts as determined, so that
 * the matrix stays finite and says "very wide"; the errors of its members are reported as infinite all the same.
 */
function assemble(values: Float64Array, vectors: Float64Array, columnNorms: number[], p: number): number[][] {
	const floor = FLAT * (values[0] || 1);
	const covariance = Array.from({ length: p }, () => new Array<number>(p).fill(0));
	for (let i = 0; i < p; i++) {
		for (let j = 0; j <= i; j++) {
			let sum = 0;
			for (let k = 0; k < p; k++) {
				const size = Math.max(values[k], floor);
				sum += (vectors[k * p + i] / size) * (vectors[k * p + j] / size);
			}
			covariance[i][j] = covariance[j][i] = sum / ((columnNorms[i] || 1) * (columnNorms[j] || 1));
		}
	}
	return covariance;
}

/** Parameters that take part in a flat direction. */
function flatMembers(vectors: Float64Array, rank: number, p: number): boolean[] {
	const flat = new Array<boolean>(p).fill(false);
	for (let k = rank; k < p; k++)
		for (let j = 0; j < p; j++) if (Math.abs(vectors[k * p + j]) > 1e-6) flat[j] = true;
	return flat;
}

/**
 * Variance of a quantity with gradient g (per parameter), for s = 1: ‖S⁻¹ Vᵀ g‖² in scaled units; Infinity where g has a part
 * along a flat direction.
 */
export function varianceAlong(spread: Spread, gradient: ArrayLike<number>): number {
	const p = spread.columnNorms.length;
	let size = 0;
	for (let j = 0; j < p; j++) size = Math.max(size, Math.abs(gradient[j] / (spread.columnNorms[j] || 1)));
	let variance = 0;
	for (let k = 0; k < p; k++) {
		let dot = 0;
		for (let j = 0; j < p; j++) dot += (spread.directions[k][j] * gradient[j]) / (spread.columnNorms[j] || 1);
		if (k < spread.rank) variance += (dot / spread.singularValues[k]) ** 2;
		else if (Math.abs(dot) > 1e-7 * size) return Infinity;
	}
	return variance;
}

/** Leverage of every residual: the diagonal of the hat matrix J (JᵀJ)⁻¹ Jᵀ. */
export function leverages(jacobian: Float64Array, m: number, p: number, spread: Spread): Float64Array {
	const out = new Float64Array(m);
	for (let k = 0; k < spread.rank; k++) {
		const direction = spread.directions[k];
		for (let i = 0; i < m; i++) {
			let u = 0;
			for (let j = 0; j < p; j++) u += (jacobian[j * m + i] / (spread.columnNorms[j] || 1)) * direction[j];
			u /= spread.singularValues[k];
			out[i] += u * u;
		}
	}
	return out;
}
