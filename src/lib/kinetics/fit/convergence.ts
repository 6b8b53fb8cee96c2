/**
 * When a least-squares search has come to rest: nothing more is gained, the step is too short to matter, or rounding hides it.
 *
 * Source: Moré, Lecture Notes in Mathematics 630 (1978) 105–116, section 8.
 */
import type { LeastSquaresStatus } from './least-squares';

const EPSILON = 2.220446049250313e-16;

/** A trial step and what it brought; reductions are relative to the sum of squares. */
export interface Progress {
	actual: number;
	predicted: number;
	ratio: number;
	/** ‖D p‖ of the step, ‖D x‖ and the trust radius. */
	length: number;
	reach: number;
	radius: number;
	ftol: number;
	xtol: number;
}

/** Null while the search should go on. */
export function convergence(progress: Progress): LeastSquaresStatus | null {
	const { actual, predicted, ratio, length, reach, radius, ftol, xtol } = progress;
	const still = Math.max(ftol, 8 * EPSILON);
	if (Math.abs(actual) <= still && predicted <= ftol && (still > ftol || ratio <= 2)) return 'reduction';
	if (radius <= xtol * reach) return 'step';
	if (length <= EPSILON * reach || radius <= EPSILON * reach) return 'rounding';
	if (Math.abs(actual) <= EPSILON && predicted <= EPSILON && ratio < 1e-4) return 'rounding';
	return null;
}
