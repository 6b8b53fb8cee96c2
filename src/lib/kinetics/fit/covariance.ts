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
	/** p × p, for s = 1; entries of undetermined parameters are Infinity on the diagonal and 0 beside it. */
	covariance: number[][];
	/** Square roots of its diagonal. */
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
	const covariance = assemble(values, vectors, columnNorms, rank, p);
	const errors = covariance.map((row, j) => Math.sqrt(row[j]));
	const correlation = covariance.map((row, i) =>
		row.map((c, j) => {
			if (i === j) return 1;
			return Number.isFinite(errors[i]) && Number.isFinite(errors[j]) ? c / (errors[i] * errors[j]) : 0;
		})
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

function assemble(
	values: Float64Array,
	vectors: Float64Array,
	columnNorms: number[],
	rank: number,
	p: number
): number[][] {
	const flat = new Array<boolean>(p).fill(false);
	for (let k = rank; k < p; k++)
		for (let j = 0; j < p; j++) if (Math.abs(vectors[k * p + j]) > 1e-6) flat[j] = true;
	const covariance = Array.from({ length: p }, () => new Array<number>(p).fill(0));
	for (let i = 0; i < p; i++) {
		for (let j = 0; j < p; j++) {
			if (flat[i] || flat[j]) {
				covariance[i][j] = i === j ? Infinity : 0;
				continue;
			}
			let sum = 0;
			for (let k = 0; k < rank; k++)
				sum += (vectors[k * p + i] / values[k]) * (vectors[k * p + j] / values[k]);
			covariance[i][j] = sum / (columnNorms[i] * columnNorms[j]);
		}
	}
	return covariance;
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
