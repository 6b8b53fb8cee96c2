/**
 * Profile-likelihood intervals: how far one parameter can move while all others are fitted again.
 *
 *     τ(θ) = √((SSR(θ) − SSR_min)/s²),  limits where τ = t(n − p)   ⇔   SSR(θ) = SSR_min (1 + F(1, n − p)/(n − p))
 *
 * SSR(θ) is an exact re-optimisation, not a table to be interpolated. τ is nearly linear in θ, and its slope is known exactly
 * (J_jᵀr/(s²τ) at a constrained optimum), so that Newton steps kept in a bracket find the limit in a few; each starts from the re-optimised parameters of the step before, moved along the
 * covariance. Where τ never reaches t before the bounds of the search, the side is open: the data do not limit the parameter
 * there, and no number is given.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | θ | `value`, on the scale of estimation |
 * | τ | `tau` |
 *
 * Sources: Bates & Watts (1988) 6.1; Venzon & Moolgavkar, Appl. Stat. 37 (1988) 87; Raue et al., Bioinformatics 25 (2009)
 * 1923 (open profiles as practical non-identifiability).
 */
import { studentQuantile } from './distributions';
import { LeastSquaresWorkspace, type LeastSquaresResult } from './least-squares';
import { leastSquares } from './levenberg-marquardt';
import type { KineticModel } from './model';
import { FitCancelled } from './search';
import type { SearchBox } from './starts';
import type { Uncertainty } from './uncertainty';

export interface ProfileInterval {
	/** On the scale of estimation; null where the profile stays open. */
	lower: number | null;
	upper: number | null;
}

export interface ProfileInput {
	model: KineticModel;
	box: SearchBox;
	best: LeastSquaresResult;
	uncertainty: Uncertainty;
	confidence: number;
	cancelled?: () => boolean;
	onParameter?: (done: number, total: number) => void;
}

export interface ProfileOutcome {
	/** In the order of the estimated parameters. */
	intervals: ProfileInterval[];
	/** A point better than the optimum that the search had missed; the search goes on from there. */
	better: Float64Array | null;
	evaluations: number;
}

/** Profile intervals of every estimated parameter. @throws FitCancelled */
export function profileIntervals(input: ProfileInput): ProfileOutcome {
	const profiler = new Profiler(input);
	const intervals: ProfileInterval[] = [];
	for (let j = 0; j < input.model.p; j++) {
		intervals.push({ lower: profiler.side(j, -1), upper: profiler.side(j, 1) });
		if (profiler.better) break;
		input.onParameter?.(j + 1, input.model.p);
	}
	return { intervals, better: profiler.better, evaluations: profiler.evaluations };
}

/** Distance of τ from t, relative, at which the last Newton step is taken on trust: its error is the square of this. */
const CLOSE = 3e-5;

/** Sums of squares this much below the reported minimum mean that it was not the minimum. */
const BETTER = 1e-6;

/** Re-optimises with one parameter held; shared by profiles, joint regions and comparisons along a path. */
export class Profiler {
	better: Float64Array | null = null;
	evaluations = 0;
	private readonly workspace: LeastSquaresWorkspace;
	private readonly lower: Float64Array;
	private readonly upper: Float64Array;
	private readonly start: Float64Array;
	private readonly t: number;
	/** dτ/dθ of the last evaluation. */
	private slope = NaN;
	/** The re-optimised parameters of the last evaluation. */
	readonly last: Float64Array;
	/** The same at the last point inside the interval. */
	private readonly anchor: Float64Array;

	constructor(private readonly input: ProfileInput) {
		const { model, uncertainty, confidence } = input;
		this.workspace = new LeastSquaresWorkspace(model.m, model.p);
		this.lower = new Float64Array(model.p);
		this.upper = new Float64Array(model.p);
		this.start = new Float64Array(model.p);
		this.last = new Float64Array(model.p);
		this.anchor = new Float64Array(model.p);
		this.t = studentQuantile(0.5 + confidence / 2, uncertainty.degreesOfFreedom);
	}

	/** One limit of parameter j; null where the profile is open on that side. */
	side(j: number, sense: -1 | 1): number | null {
		const { best, box } = this.input;
		if (this.better) return null;
		const bound = sense < 0 ? box.lower[j] : box.upper[j];
		if (sense * (bound - best.x[j]) <= 0) return null;
		const error = this.input.uncertainty.errors[j];
		const span = Math.abs(box.to[j] - box.from[j]) || 1;
		let step = Number.isFinite(error) && error > 0 ? Math.min(this.t * error, 0.5 * span) : 0.05 * span;
		let inside = best.x[j];
		this.last.set(best.x);
		for (let k = 0; k < 60; k++) {
			const reach = inside + sense * step;
			const value = sense * (reach - bound) >= 0 ? bound : reach;
			this.anchor.set(this.last);
			const tau = this.tau(j, value, inside);
			if (this.better) return null;
			if (tau >= this.t * (1 - CLOSE)) return this.close(j, inside, value, tau, bound);
			if (value === bound) return null;
			inside = value;
			// Aim where the slope of τ foretells the crossing; where τ flattens, stride out.
			const newton = sense * this.slope > 0 ? (this.t - tau) / Math.abs(this.slope) : Infinity;
			step = Math.max(Math.min(1.02 * newton, 4 * step), 1e-3 * span);
		}
		return null;
	}

	/**
	 * Root of τ − t: Newton steps with the exact slope, kept between a point inside and one outside. Each starts from the
	 * point inside: far outside the re-optimisation may have lost its way, and what it found there is no place to start from.
	 */
	private close(j: number, start: number, outside: number, tau: number, bound: number): number | null {
		let [inside, b] = [start, outside];
		let value = outside;
		for (let k = 0; k < 60; k++) {
			if (tau < this.t) {
				inside = value;
				this.anchor.set(this.last);
			} else b = value;
			let next = value + (this.t - tau) / this.slope;
			// Close enough for one last Newton step to square the error away.
			if (Math.abs(tau - this.t) <= CLOSE * this.t && Number.isFinite(next))
				return Math.abs(next - start) > Math.abs(bound - start) ? bound : next;
			if (!(next > Math.min(inside, b) && next < Math.max(inside, b))) next = 0.5 * (inside + b);
			if (Math.abs(b - inside) <= 1e-12 * Math.max(Math.abs(inside), Math.abs(b), 1)) break;
			this.last.set(this.anchor);
			tau = this.tau(j, next, inside);
			if (this.better) return value;
			value = next;
		}
		// All the way to the bound without reaching t: open.
		return b === bound ? null : 0.5 * (inside + b);
	}

	/** τ at a value of parameter j, from the last re-optimised point. */
	tau(j: number, value: number, previous: number): number {
		const { best, uncertainty } = this.input;
		const ssr = this.reoptimise(j, value, previous);
		if (ssr < best.ssr * (1 - BETTER)) this.better = this.last.slice();
		const s = uncertainty.s ?? NaN;
		const tau = Math.sqrt(Math.max(0, ssr - best.ssr)) / s;
		// At a constrained optimum dSSR/dθ is the partial derivative 2 J_jᵀ r alone.
		this.slope = this.workspace.gradient[j] / (s * s * tau);
		return tau;
	}

	private reoptimise(j: number, value: number, previous: number): number {
		const { model, box, uncertainty, cancelled } = this.input;
		this.lower.set(box.lower);
		this.upper.set(box.upper);
		this.lower[j] = this.upper[j] = value;
		const variance = uncertainty.covariance[j][j];
		for (let k = 0; k < model.p; k++) {
			const along = variance > 0 ? uncertainty.covariance[k][j] / variance : 0;
			const move = Number.isFinite(along) ? along * (value - previous) : 0;
			const limit = 0.5 * Math.abs(box.to[k] - box.from[k]);
			this.start[k] = this.last[k] + Math.min(Math.max(move, -limit), limit);
		}
		this.start[j] = value;
		const options = {
			lower: this.lower,
			upper: this.upper,
			ftol: 1e-11,
			xtol: 1e-6,
			maxEvaluations: 150,
			factor: 10,
			cancelled
		};
		let result = leastSquares(model, this.start, options, this.workspace);
		if (result.status === 'not finite') {
			this.last[j] = value;
			result = leastSquares(model, this.last, options, this.workspace);
		}
		this.evaluations += result.evaluations;
		if (result.status === 'cancelled') throw new FitCancelled();
		this.last.set(result.x);
		return Number.isFinite(result.ssr) ? result.ssr : Infinity;
	}
}
