/**
 * The trust region of a Levenberg–Marquardt search: its radius Δ and the μ that goes with it, after each trial step.
 *
 * A step that reduces the sum of squares by more than ¾ of what was foretold lets Δ grow; one below ¼ shrinks it, by the
 * factor that a parabola through the trial gives, between 0.1 and 0.5.
 *
 * Source: Moré, Lecture Notes in Mathematics 630 (1978) 105–116, algorithm 7.1.
 */
export interface Trial {
	/** Actual over predicted reduction. */
	ratio: number;
	/** Relative reduction of the sum of squares. */
	actual: number;
	/** ‖D p‖ of the step. */
	length: number;
	/** Whether the model could be evaluated there. */
	finite: boolean;
	predicted: number;
}

export class TrustRadius {
	radius = 0;
	mu = 0;

	/** @param slope gives pᵀJᵀr/‖r‖², asked only where the step led uphill */
	resize({ ratio, actual, length, finite, predicted }: Trial, slope: () => number): void {
		if (!finite || predicted <= 0) {
			this.radius = 0.1 * Math.min(this.radius, length);
			this.mu *= 10;
			return;
		}
		if (ratio <= 0.25) {
			const shrink = actual < 0 ? parabola(slope(), actual) : 0.5;
			this.radius = shrink * Math.min(this.radius, 10 * length);
			this.mu /= shrink;
		} else if (this.mu === 0 || ratio >= 0.75) {
			this.radius = Math.max(this.radius, 2 * length);
			this.mu *= 0.5;
		}
	}
}

function parabola(slope: number, actual: number): number {
	const shrink = (0.5 * slope) / (slope + 0.5 * actual);
	if (!(shrink >= 0.1)) return 0.1;
	return Math.min(shrink, 0.5);
}
