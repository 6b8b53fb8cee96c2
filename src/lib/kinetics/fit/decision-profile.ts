/**
 * Profile-likelihood interval of a time that a condition on the curve defines (see `decision.ts` for formulas and sources).
 */
import type { CurveOfSpecies } from './decision-curve';
import { LeastSquaresWorkspace, type LeastSquaresProblem } from './least-squares';
import { leastSquares } from './levenberg-marquardt';
import type { RestoredFit } from './restore';
import { FitCancelled } from './search';
import { searchBox, type SearchBox } from './starts';

/** How firmly the condition holds: a miss of one standard error of the time counts as this many residuals of size s. */
const FIRMNESS = 1e5;
const STEPS = 40;
/** Missed by more than this many residuals of size s (a thousandth of a standard error), the condition does not hold at all. */
const MISSED = 1e-3 * FIRMNESS;

export class ConstrainedProfile {
	private readonly box: SearchBox;
	private readonly workspace: LeastSquaresWorkspace;
	private last: Float64Array;
	private weight = 0;

	constructor(
		private readonly fitted: RestoredFit,
		private readonly ssr: number,
		private readonly s: number,
		private readonly curve: CurveOfSpecies,
		private readonly cancelled?: () => boolean
	) {
		this.box = searchBox(fitted.problem);
		this.workspace = new LeastSquaresWorkspace(fitted.model.m + 1, fitted.model.p);
		this.last = fitted.x.slice();
	}

	/**
	 * @param time the estimate, `error` its standard error, `t` the quantile, `horizon` the latest time looked at
	 * @returns both ends; null for one that is not reached
	 */
	interval(time: number, error: number, t: number, horizon: number): [number | null, number | null] {
		// σ of g itself; the same at every time, for far out ∂g/∂t may vanish while the condition still means something.
		const spread = Math.abs(this.curve.at(this.fitted.x, time).slope) * error;
		if (!(spread > 0)) return [null, null];
		this.weight = (FIRMNESS * this.s) / spread;
		return [this.side(time, error, t, 0, -1), this.side(time, error, t, horizon, 1)];
	}

	private side(time: number, error: number, t: number, bound: number, sense: -1 | 1): number | null {
		this.last = this.fitted.x.slice();
		let inside = time;
		let tauInside = 0;
		let step = t * error;
		for (let k = 0; k < STEPS; k++) {
			// Towards zero in proportion: no time of a condition is negative.
			const reach = sense > 0 ? inside + step : Math.max(inside - step, 0.5 * inside);
			if (sense > 0 ? reach > bound : reach < 1e-6 * time) return null;
			const tau = this.tau(reach);
			if (tau >= t) return this.root(inside, tauInside, reach, tau, error, t);
			step = Math.min(
				4 * step,
				tau > tauInside ? (1.1 * (t - tau) * (reach - inside) * sense) / (tau - tauInside) : 4 * step
			);
			step = Math.max(step, 0.05 * t * error);
			[inside, tauInside] = [reach, tau];
		}
		return null;
	}

	/** Root of τ − t between a point inside and one outside (regula falsi, Illinois). */
	private root(a: number, tauA: number, b: number, tauB: number, error: number, t: number): number {
		let [fa, fb] = [tauA - t, tauB - t];
		for (let k = 0; k < STEPS && Math.abs(b - a) > 1e-6 * error; k++) {
			const straight = Number.isFinite(fa) && Number.isFinite(fb);
			const next = straight ? b - (fb * (b - a)) / (fb - fa) : 0.5 * (a + b);
			const f = this.tau(next) - t;
			if (Math.abs(f) < 1e-6 * t) return next;
			// An end without a number is halved against; the bracket is kept.
			if (!straight && f > 0 === fa > 0) [a, fa] = [next, f];
			else {
				if (f > 0 === fb > 0) fa *= 0.5;
				else [a, fa] = [b, fb];
				[b, fb] = [next, f];
			}
		}
		return 0.5 * (a + b);
	}

	/** τ with the condition held at this time; Infinity where the bounds of the fit leave no curve that meets it. */
	private tau(time: number): number {
		const { model } = this.fitted;
		const options = {
			lower: this.box.lower,
			upper: this.box.upper,
			cancelled: this.cancelled,
			ftol: 1e-12,
			maxEvaluations: 200,
			factor: 10
		};
		const result = leastSquares(this.problem(time), this.last, options, this.workspace);
		if (result.status === 'cancelled') throw new FitCancelled();
		if (!Number.isFinite(result.ssr)) return Infinity;
		if (Math.abs(result.residuals[model.m]) > MISSED * this.s) return Infinity;
		this.last = result.x;
		const own = result.residuals.subarray(0, model.m).reduce((sum, r) => sum + r * r, 0);
		return Math.sqrt(Math.max(0, own - this.ssr)) / this.s;
	}

	/** The fit's own residuals and the condition as one more. */
	private problem(time: number): LeastSquaresProblem {
		const { model } = this.fitted;
		const { weight } = this;
		const { m, p } = model;
		const residuals = new Float64Array(m);
		const jacobian = new Float64Array(m * p);
		return {
			m: m + 1,
			p,
			evaluate: (x, r, j) => {
				if (!model.evaluate(x, residuals, jacobian)) return false;
				r.set(residuals);
				for (let c = 0; c < p; c++) j.set(jacobian.subarray(c * m, (c + 1) * m), c * (m + 1));
				const { gap, gapGradient } = this.curve.at(x, time);
				r[m] = weight * gap;
				for (let c = 0; c < p; c++) j[c * (m + 1) + m] = weight * gapGradient[c];
				return true;
			}
		};
	}
}
