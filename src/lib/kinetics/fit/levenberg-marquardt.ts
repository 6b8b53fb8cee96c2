/**
 * Nonlinear least squares: minimise ½‖r(x)‖² within bounds, with an analytic Jacobian.
 *
 * Each iteration solves min ‖J p + r‖ subject to ‖D p‖ ≤ Δ, where D holds the largest column norms seen so far, so that
 * the path does not depend on the units of the parameters. Inside the trust region the Gauss–Newton step is taken;
 * otherwise (JᵀJ + μ D²) p = −Jᵀ r with μ found by a safeguarded Newton iteration on ‖D p(μ)‖ = Δ (`trust-step.ts`).
 * Ratio ρ = actual / predicted reduction steers Δ; a worse point is never kept.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | r, J   | `residuals`, `jacobian` (column-major, J[j·m + i] = ∂rᵢ/∂xⱼ) |
 * | D      | `scale` |
 * | Δ, μ   | `trust.radius`, `trust.mu` |
 * | p      | `step` |
 *
 * Sources: Moré, "The Levenberg–Marquardt algorithm: implementation and theory", Lecture Notes in Mathematics 630 (1978)
 * 105–116. Bounds: active-set projection, Kanzow, Yamashita & Fukushima, J. Comput. Appl. Math. 172 (2004) 375.
 * Departure: residuals and Jacobian are computed together at a trial point, because the closed form gives both at little
 * more than the cost of one.
 */
import { convergence } from './convergence';
import { finite, norm } from './linear-algebra';
import {
	LeastSquaresWorkspace,
	type LeastSquaresOptions,
	type LeastSquaresProblem,
	type LeastSquaresResult,
	type LeastSquaresStatus
} from './least-squares';
import { activeBoundsAt, measureSlope } from './slope';
import { TrustRadius } from './trust-radius';

/**
 * Minimises the sum of squares from `start`.
 * The arrays of the result are fresh copies. Never throws for numerical reasons and never returns a point worse than the start.
 */
export function leastSquares(
	problem: LeastSquaresProblem,
	start: ArrayLike<number>,
	options: LeastSquaresOptions = {},
	workspace = new LeastSquaresWorkspace(problem.m, problem.p)
): LeastSquaresResult {
	return new Search(problem, options, workspace).run(start);
}

class Search {
	readonly lower: ArrayLike<number>;
	readonly upper: ArrayLike<number>;
	private readonly ftol: number;
	private readonly xtol: number;
	private readonly gtol: number;
	private readonly maxEvaluations: number;
	private current = 0;
	private ssr = Infinity;
	private readonly trust = new TrustRadius();
	private evaluations = 0;
	private iterations = 0;
	private optimality = Infinity;
	private freeCount = 0;
	private clipped = false;
	private predicted = 0;

	constructor(
		private readonly problem: LeastSquaresProblem,
		private readonly options: LeastSquaresOptions,
		private readonly w: LeastSquaresWorkspace
	) {
		const p = problem.p;
		this.lower = options.lower ?? new Float64Array(p).fill(-Infinity);
		this.upper = options.upper ?? new Float64Array(p).fill(Infinity);
		this.ftol = options.ftol ?? 1e-17;
		this.xtol = options.xtol ?? 1e-12;
		this.gtol = options.gtol ?? 1e-13;
		this.maxEvaluations = options.maxEvaluations ?? 200 * (p + 1);
	}

	run(start: ArrayLike<number>): LeastSquaresResult {
		const { problem, w } = this;
		for (let j = 0; j < problem.p; j++) w.x[j] = Math.min(Math.max(start[j], this.lower[j]), this.upper[j]);
		if (this.options.cancelled?.()) return this.finish('cancelled');
		this.evaluations++;
		const ok = problem.evaluate(w.x, w.residuals[0], w.jacobians[0]);
		if (!ok || !finite(w.residuals[0]) || !finite(w.jacobians[0])) return this.finish('not finite');
		this.ssr = norm(w.residuals[0]) ** 2;
		w.scale.fill(0);
		for (;;) {
			const status = this.iterate();
			if (!status) continue;
			if (status !== 'cancelled' && status !== 'evaluations')
				for (let k = 0; k < (this.options.polish ?? 0) && this.polish(); k++);
			return this.finish(status);
		}
	}

	/** One outer iteration: a new linearisation, then trial steps until one is accepted. */
	private iterate(): LeastSquaresStatus | null {
		this.iterations++;
		this.measure();
		if (this.freeCount === 0 || this.ssr === 0 || this.optimality <= this.gtol) return 'gradient';
		this.rescale();
		const { w, problem } = this;
		this.factor();
		for (;;) {
			const length = this.propose();
			if (this.iterations === 1) this.trust.radius = Math.min(this.trust.radius, length || this.trust.radius);
			if (this.evaluations >= this.maxEvaluations) return 'evaluations';
			if (this.options.cancelled?.()) return 'cancelled';
			const next = 1 - this.current;
			this.evaluations++;
			const ok = problem.evaluate(w.trial, w.residuals[next], w.jacobians[next]);
			const size = ok ? norm(w.residuals[next]) : NaN;
			const trialSsr = ok && Number.isFinite(size) && finite(w.jacobians[next]) ? size * size : Infinity;
			const actual = trialSsr === Infinity ? -1 : 1 - trialSsr / this.ssr;
			const ratio = this.predicted > 0 ? actual / this.predicted : 0;
			this.trust.resize(
				{ ratio, actual, length, finite: trialSsr !== Infinity, predicted: this.predicted },
				() => this.relativeSlope()
			);
			const verdict = this.verdict(actual, ratio, length);
			// The last step moves the parameters by less than the sum of squares can show: its digits are kept all the same.
			const better = trialSsr < this.ssr || (verdict === 'reduction' && trialSsr <= this.ssr * (1 + 1e-14));
			if (better && (ratio >= 1e-4 || verdict)) {
				w.x.set(w.trial);
				this.current = next;
				this.ssr = trialSsr;
				if (verdict) this.measure();
				return verdict;
			}
			if (verdict) return verdict;
		}
	}

	private factor(): void {
		const { w, current } = this;
		w.trust.factor(w.jacobians[current], w.residuals[current], w.free, this.freeCount, this.problem.watch);
	}

	/** One full step; kept, and true, where it at least halves the optimality and the sum of squares stays. */
	private polish(): boolean {
		const { w, problem } = this;
		this.measure();
		const before = this.optimality;
		if (!(before > this.gtol) || this.freeCount === 0) return false;
		this.factor();
		this.trust.mu = 0;
		this.trust.radius = Number.MAX_VALUE;
		this.propose();
		if (this.clipped || this.options.cancelled?.()) return false;
		const next = 1 - this.current;
		this.evaluations++;
		if (!problem.evaluate(w.trial, w.residuals[next], w.jacobians[next])) return false;
		const ssr = norm(w.residuals[next]) ** 2;
		if (!(ssr <= this.ssr * (1 + 1e-13)) || !finite(w.jacobians[next])) return false;
		const held = { x: w.x.slice(), ssr: this.ssr };
		w.x.set(w.trial);
		this.ssr = ssr;
		this.current = next;
		this.measure();
		if (this.optimality <= 0.5 * before) return true;
		w.x.set(held.x);
		this.ssr = held.ssr;
		this.current = 1 - next;
		this.measure();
		return false;
	}

	private measure(): void {
		const found = measureSlope(this.problem, this.w, this.current, this.ssr, this);
		this.freeCount = found.freeCount;
		this.optimality = found.optimality;
	}

	/** D grows to the largest column norms; the first radius is set from D x. */
	private rescale(): void {
		const { w, problem } = this;
		for (let j = 0; j < problem.p; j++) w.scale[j] = Math.max(w.scale[j], w.norms[j]);
		if (this.iterations > 1) return;
		const factor = this.options.factor ?? 100;
		this.trust.radius = factor * (this.scaledNorm(w.x) || 1);
	}

	private scaledNorm(v: Float64Array): number {
		let sum = 0;
		for (let j = 0; j < this.problem.p; j++) sum += ((this.w.scale[j] || 1) * v[j]) ** 2;
		return Math.sqrt(sum);
	}

	/** Fills `trial` and `step`, sets `predicted` (relative) and returns ‖D step‖. */
	private propose(): number {
		const { w, problem } = this;
		this.trust.mu = w.trust.solve(w.scale, this.trust.radius, this.trust.mu);
		w.step.fill(0);
		this.clipped = false;
		for (let k = 0; k < this.freeCount; k++) w.step[w.free[k]] = w.trust.step[k];
		for (let j = 0; j < problem.p; j++) {
			const moved = w.x[j] + w.step[j];
			w.trial[j] = Math.min(Math.max(moved, this.lower[j]), this.upper[j]);
			if (w.trial[j] !== moved) {
				this.clipped = true;
				w.step[j] = w.trial[j] - w.x[j];
			}
		}
		const length = this.scaledNorm(w.step);
		this.predict(length);
		return length;
	}

	/** (‖r‖² − ‖r + J p‖²)/‖r‖², without cancellation where the step is the solver's own. */
	private predict(length: number): void {
		const { w, problem } = this;
		let slope = 0;
		for (let j = 0; j < problem.p; j++) slope += w.step[j] * w.gradient[j];
		const along = w.trust.lengthAlong(w.step) ** 2;
		this.predicted = this.clipped
			? (-2 * slope - along) / this.ssr
			: (along + 2 * this.trust.mu * length * length) / this.ssr;
	}

	private relativeSlope(): number {
		let slope = 0;
		for (let j = 0; j < this.problem.p; j++) slope += this.w.step[j] * this.w.gradient[j];
		return slope / this.ssr;
	}

	private verdict(actual: number, ratio: number, length: number): LeastSquaresStatus | null {
		const { predicted, ftol, xtol } = this;
		const reach = this.scaledNorm(this.w.x);
		return convergence({ actual, ratio, predicted, length, reach, radius: this.trust.radius, ftol, xtol });
	}

	private finish(status: LeastSquaresStatus): LeastSquaresResult {
		const { w } = this;
		return {
			status,
			converged:
				status === 'gradient' || status === 'reduction' || status === 'step' || status === 'rounding',
			x: w.x.slice(),
			residuals: w.residuals[this.current].slice(),
			jacobian: w.jacobians[this.current].slice(),
			ssr: this.ssr,
			evaluations: this.evaluations,
			iterations: this.iterations,
			optimality: this.optimality,
			activeBounds: activeBoundsAt(w.x, this)
		};
	}
}
