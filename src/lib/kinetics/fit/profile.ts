/**
 * Profile-likelihood intervals: how far one parameter can move while all others are fitted again.
 *
 *     τ(θ) = √((SSR(θ) − SSR_min)/s²),  limits where τ = t(n − p)   ⇔   SSR(θ) = SSR_min (1 + F(1, n − p)/(n − p))
 *
 * SSR(θ) is an exact re-optimisation (`profile-held.ts`), not a table to be interpolated. τ is nearly linear in θ, and its slope
 * is known exactly (J_jᵀr/(s²τ) at a constrained optimum), so that Newton steps kept in a bracket find the limit in a few; each
 * starts from the re-optimised parameters of the step before, moved along the covariance. Where τ never reaches t before the
 * bounds of the search, the side is open: the data do not limit the parameter there, and no number is given. So it is where τ comes
 * to t only because another parameter has met a bound of the search: with that bound moved out, τ stays below.
 *
 * A limit found on one branch is not yet the limit of the profile, which is the lowest of all branches. Unless the profile is
 * as a linear model foretells and every parameter within sight of the data, the others are therefore fitted from further
 * starting points at the limit; where one of them lies below, the search goes on outwards from there. Where the profile falls
 * again between two steps, the hump between them is looked at: the limit is the crossing nearest to the estimate.
 *
 * What remains: a branch that none of the starting points leads to is missed, and the interval is then too short. In a campaign of
 * 198 random, poorly determined fits (1 to 3 runs of 5 to 8 rows, schemes of 3 and 4 species of which some are not assayed, with
 * fitted energies and charges), 1 650 limits and open sides were compared with minimisations from 14 to 32 starts by a library of
 * its own model: two limits of one fit lay on a branch 7 % above the lowest misfit (a pre-equilibrium outside the span of
 * starting points); three more held to 2e-4 of the target; no crossing lay nearer the estimate than the one reported. A profile
 * that rises above the target and falls again within one step, with the same slopes at both ends as without, is not seen.
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
import { HeldFit, type HeldFitInput } from './profile-held';
import { topOfCubic, type ProfilePoint } from './profile-point';

export interface ProfileInterval {
	/** On the scale of estimation; null where the profile stays open. */
	lower: number | null;
	upper: number | null;
}

export interface ProfileInput extends HeldFitInput {
	confidence: number;
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
/** Limits within this share of what the standard error foretells need no further starting points. */
const FORETOLD = 0.15;
/** Half interval, as a share of the span that the data can show, up to which a parameter counts as determined. */
const WELL_KNOWN = 0.1;
/** τ must fall this much below t, relative, to go on outwards: less is the same branch. */
const LOWER = 1e-4;
/** τ must fall this much below t, relative, when a bound of the search is moved out, for the limit to be its doing. */
const LEANS = 0.01;
/** How often a limit may turn out not to be one. */
const MOST_BRANCHES = 15;
const STEPS = 60;

/** Follows the profiles of one fit. */
export class Profiler {
	better: Float64Array | null = null;
	private readonly held: HeldFit;
	private readonly t: number;

	constructor(private readonly input: ProfileInput) {
		this.held = new HeldFit(input);
		this.t = studentQuantile(0.5 + input.confidence / 2, input.uncertainty.degreesOfFreedom);
	}

	get evaluations(): number {
		return this.held.evaluations;
	}

	/** The re-optimised parameters of the last evaluation. */
	get last(): Float64Array {
		return this.held.last;
	}

	/** One limit of parameter j; null where the profile is open on that side. */
	side(j: number, sense: -1 | 1): number | null {
		const { best, box } = this.input;
		if (this.better) return null;
		const bound = sense < 0 ? box.lower[j] : box.upper[j];
		if (sense * (bound - best.x[j]) <= 0) return null;
		this.held.replenish();
		let from: ProfilePoint = { value: best.x[j], tau: 0, slope: NaN, x: best.x.slice() };
		for (let k = 0; k < MOST_BRANCHES; k++) {
			const limit = this.crossing(j, sense, from, bound);
			if (limit === null || this.better || !this.doubtful(j, limit)) return limit;
			const tau = this.lowerTau(j, limit, this.t * (1 - LOWER));
			if (this.better) return limit;
			if (tau === null) return this.madeBySearch(j, limit) ? null : limit;
			from = this.point(limit, tau);
		}
		return from.value;
	}

	/** Whether τ came to t only because another parameter met a bound of the search: the data set no limit there. */
	private madeBySearch(j: number, limit: number): boolean {
		const { best, uncertainty } = this.input;
		const s = uncertainty.s ?? NaN;
		return this.held.leansOnSearchBounds(j, limit, best.ssr + (s * this.t * (1 - LEANS)) ** 2);
	}

	/** Steps outwards from a point inside until τ passes t; null where the bound comes first. */
	private crossing(j: number, sense: -1 | 1, from: ProfilePoint, bound: number): number | null {
		const error = this.input.uncertainty.errors[j];
		const span = Math.abs(this.input.box.to[j] - this.input.box.from[j]) || 1;
		let inside = from;
		let step = Number.isFinite(error) && error > 0 ? Math.min(this.t * error, 0.5 * span) : 0.05 * span;
		if (from.tau > 0) step = this.stride(inside, sense, step, span);
		for (let k = 0; k < STEPS; k++) {
			const reach = inside.value + sense * step;
			const value = sense * (reach - bound) >= 0 ? bound : reach;
			const there = this.from(j, inside, value);
			if (this.better) return null;
			const outside = this.beyond(there) ? there : this.hump(j, sense, inside, there);
			if (this.better) return null;
			if (outside) return this.close(j, inside, outside, bound);
			if (value === bound) return null;
			inside = there;
			step = this.stride(inside, sense, step, span);
		}
		return null;
	}

	/** Aims where the slope of τ foretells the crossing; where τ flattens, strides out. */
	private stride({ tau, slope }: ProfilePoint, sense: number, step: number, span: number): number {
		const newton = sense * slope > 0 ? (this.t - tau) / Math.abs(slope) : Infinity;
		return Math.max(Math.min(1.02 * newton, 4 * step), 1e-3 * span);
	}

	private beyond({ tau }: ProfilePoint): boolean {
		return tau >= this.t * (1 - CLOSE);
	}

	/**
	 * A point beyond t between two points inside, where the profile rises at the first and falls at the second: looked for at the
	 * top of the cubic through both, then of the side that still rises.
	 */
	private hump(j: number, sense: number, a: ProfilePoint, b: ProfilePoint): ProfilePoint | null {
		let [left, right] = [a, b];
		for (let k = 0; k < 6 && sense * right.slope < 0 && !(sense * left.slope < 0); k++) {
			const width = right.value - left.value;
			if (Math.abs(width) <= 1e-6 * (1 + Math.abs(right.value))) return null;
			const middle = this.from(j, left, left.value + topOfCubic(left, right) * width);
			if (this.better) return null;
			if (this.beyond(middle)) return middle;
			if (sense * middle.slope > 0) left = middle;
			else right = middle;
		}
		return null;
	}

	/**
	 * Root of τ − t: Newton steps with the exact slope, kept between a point inside and one outside. Each starts from the
	 * point inside: far outside the re-optimisation may have lost its way, and what it found there is no place to start from.
	 */
	private close(j: number, start: ProfilePoint, outside: ProfilePoint, bound: number): number | null {
		let [inside, b, here] = [start, outside.value, outside];
		for (let k = 0; k < STEPS; k++) {
			if (here.tau < this.t) inside = here;
			else b = here.value;
			const next = here.value + (this.t - here.tau) / here.slope;
			// Close enough for one last Newton step to square the error away.
			if (Math.abs(here.tau - this.t) <= CLOSE * this.t && this.trusted(next, here, inside.value, b))
				return (next - bound) * (bound - start.value) > 0 ? bound : next;
			if (Math.abs(b - inside.value) <= 1e-12 * Math.max(Math.abs(inside.value), Math.abs(b), 1)) break;
			const within = next > Math.min(inside.value, b) && next < Math.max(inside.value, b);
			here = this.from(j, inside, within ? next : 0.5 * (inside.value + b));
			if (this.better) return here.value;
		}
		// All the way to the bound without reaching t: open.
		return b === bound ? null : 0.5 * (inside.value + b);
	}

	/** A last step that stays near: beside the bracket no further than the bracket is wide. */
	private trusted(next: number, here: ProfilePoint, inside: number, outside: number): boolean {
		return Number.isFinite(next) && Math.abs(next - here.value) <= Math.abs(outside - inside) + 1e-4;
	}

	/** Whether the limit may belong to a branch that is not the lowest. */
	private doubtful(j: number, limit: number): boolean {
		const { best, box, uncertainty } = this.input;
		const { errors } = uncertainty;
		const foretold = Math.abs(limit - best.x[j]) / (this.t * errors[j]);
		if (!(Math.abs(foretold - 1) <= FORETOLD)) return true;
		// One that the data hardly determine can take any limit along to another branch.
		if (errors.some((e, k) => !(this.t * e <= WELL_KNOWN * Math.abs(box.to[k] - box.from[k])))) return true;
		return this.held.outOfSight(best.x) || this.held.outOfSight(this.held.last);
	}

	/** τ at the value where further starting points lead below `tau`; null where none does. */
	private lowerTau(j: number, value: number, tau: number): number | null {
		const s = this.input.uncertainty.s ?? NaN;
		const below = this.input.best.ssr + (s * tau) ** 2;
		return this.held.findsLower(j, value, below) ? this.from(j, this.point(value, 0), value).tau : null;
	}

	private point(value: number, tau: number): ProfilePoint {
		const s = this.input.uncertainty.s ?? NaN;
		return { value, tau, slope: this.held.slope / (2 * s * s * tau), x: this.held.last.slice() };
	}

	/** τ at a value, followed from a point. */
	private from(j: number, start: ProfilePoint, value: number): ProfilePoint {
		this.held.last.set(start.x);
		const rise = Number.isFinite(start.slope) ? 2 * Math.abs(start.slope * (value - start.value)) : this.t;
		const tau = this.tau(j, value, start.value, start.tau + rise + 0.2 * this.t);
		return this.point(value, tau);
	}

	/** τ at a value of parameter j, from the last re-optimised point; above `expected` it is looked at twice. */
	tau(j: number, value: number, previous: number, expected = Infinity): number {
		const { best, uncertainty } = this.input;
		const s = uncertainty.s ?? NaN;
		const ssr = this.held.follow(j, value, previous, best.ssr + (s * expected) ** 2);
		if (ssr < best.ssr * (1 - BETTER)) this.better = this.held.last.slice();
		return Math.sqrt(Math.max(0, ssr - best.ssr)) / s;
	}

	/** The same as the lowest of all branches that further starting points lead to. */
	lowestTau(j: number, value: number, previous: number): number {
		this.held.replenish();
		const tau = this.tau(j, value, previous);
		if (this.better || !(tau > 0.3 * this.t)) return tau;
		return this.lowerTau(j, value, tau * (1 - 1e-4)) ?? tau;
	}
}
