/**
 * What a nonlinear least-squares problem is, how its search is steered and what it gives back.
 */
import { TrustStep } from './trust-step';

export interface LeastSquaresProblem {
	/** Residuals. */
	m: number;
	/** Parameters. */
	p: number;
	/** Called inside long work between two evaluations; may throw to stop. */
	watch?: (() => void) | null;
	/**
	 * Fills `residuals` (m) and `jacobian` (m × p, column-major) at x.
	 * Returns false where the model cannot be evaluated; the step is then shortened.
	 */
	evaluate(x: Float64Array, residuals: Float64Array, jacobian: Float64Array): boolean;
}

export interface LeastSquaresOptions {
	/** Length p; −Infinity where unbounded. Equal bounds hold a parameter fixed. */
	lower?: ArrayLike<number>;
	upper?: ArrayLike<number>;
	/** Relative reduction of the sum of squares below which the search has converged. */
	ftol?: number;
	/** Relative change of the scaled parameters below which the search has converged. */
	xtol?: number;
	/** Cosine of the largest angle between the residual vector and a column of J below which it has converged. */
	gtol?: number;
	maxEvaluations?: number;
	/** First trust radius as a multiple of ‖D x₀‖ (or itself where that is zero). */
	factor?: number;
	/**
	 * Full Gauss–Newton steps after the sum of squares has stopped changing, kept while they at least halve the optimality: the
	 * sum shows a parameter to the square root of rounding only, the gradient shows it to rounding. 0 unless given.
	 */
	polish?: number;
	/** Asked before every evaluation; true stops at once with status 'cancelled'. */
	cancelled?: () => boolean;
}

export type LeastSquaresStatus =
	| 'gradient' // optimality reached
	| 'reduction' // the sum of squares changes no more
	| 'step' // the parameters change no more
	| 'rounding' // no further progress in double precision
	| 'evaluations' // the limit on evaluations
	| 'not finite' // the model cannot be evaluated at the start
	| 'cancelled';

export interface LeastSquaresResult {
	status: LeastSquaresStatus;
	converged: boolean;
	x: Float64Array;
	residuals: Float64Array;
	jacobian: Float64Array;
	/** Sum of squared residuals. */
	ssr: number;
	evaluations: number;
	iterations: number;
	/** Largest cosine between the residual vector and a free column of J; 0 for a zero residual. */
	optimality: number;
	/** −1, +1 for a parameter held at its lower or upper bound at the end, else 0. */
	activeBounds: Int8Array;
}

/** Reusable storage for problems of one shape, so that many starts allocate nothing in their loops. */
export class LeastSquaresWorkspace {
	readonly residuals: [Float64Array, Float64Array];
	readonly jacobians: [Float64Array, Float64Array];
	readonly x: Float64Array;
	readonly trial: Float64Array;
	readonly step: Float64Array;
	readonly scale: Float64Array;
	readonly gradient: Float64Array;
	readonly free: Int32Array;
	readonly norms: Float64Array;
	readonly trust: TrustStep;

	constructor(
		readonly m: number,
		readonly p: number
	) {
		this.residuals = [new Float64Array(m), new Float64Array(m)];
		this.jacobians = [new Float64Array(m * p), new Float64Array(m * p)];
		this.x = new Float64Array(p);
		this.trial = new Float64Array(p);
		this.step = new Float64Array(p);
		this.scale = new Float64Array(p);
		this.gradient = new Float64Array(p);
		this.free = new Int32Array(p);
		this.norms = new Float64Array(p);
		this.trust = new TrustStep(m, p);
	}
}
