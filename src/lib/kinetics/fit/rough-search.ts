/**
 * One descent from one starting point, as far as it takes to tell which minimum it leads to.
 *
 * Where parameters enter linearly they are eliminated (`variable-projection.ts`). A descent whose linear parameters end outside their
 * bounds, or that cannot be evaluated or does not converge, is made again with all parameters; whatever comes of it is a point of the full problem.
 */
import { eliminationOf, type Elimination } from './elimination';
import { LeastSquaresWorkspace, type LeastSquaresResult } from './least-squares';
import { leastSquares } from './levenberg-marquardt';
import type { KineticModel } from './model';
import { activeBoundsAt, measureSlope } from './slope';
import type { SearchBox } from './starts';
import { ProjectedModel } from './variable-projection';

const ROUGH = { ftol: 1e-6, xtol: 1e-4, maxEvaluations: 120, factor: 10 };
/** Without the linear parameters to hold it back a first step can land on flat ground: it is kept to a tenth of the parameters. */
const PROJECTED = { ...ROUGH, factor: 0.1 };

export class RoughSearch {
	readonly elimination: Elimination;
	/** Descents that had to be made with all parameters although some enter linearly. */
	inFull = 0;
	private readonly projected: ProjectedModel | null;
	private readonly reduced: LeastSquaresWorkspace | null;
	private readonly bounds: { lower: Float64Array; upper: Float64Array };

	constructor(
		private readonly model: KineticModel,
		private readonly box: SearchBox,
		private readonly workspace: LeastSquaresWorkspace,
		private readonly cancelled?: () => boolean
	) {
		this.elimination = eliminationOf(model.problem, box);
		const { linear } = this.elimination;
		this.projected = linear.length ? new ProjectedModel(model, linear) : null;
		this.reduced = this.projected && new LeastSquaresWorkspace(this.projected.m, this.projected.p);
		const places = this.projected?.nonlinear ?? [];
		this.bounds = {
			lower: Float64Array.from(places, (j) => box.lower[j]),
			upper: Float64Array.from(places, (j) => box.upper[j])
		};
	}

	/** The evaluations of the result are those of the model, all ways together. */
	from(start: Float64Array): LeastSquaresResult {
		let spent = 0;
		if (this.projected && this.reduced) {
			const { projected } = this;
			projected.evaluations = 0;
			const theta = projected.begin(start);
			const found = leastSquares(
				projected,
				theta,
				{ ...PROJECTED, ...this.bounds, cancelled: this.cancelled },
				this.reduced
			);
			spent = projected.evaluations;
			const full = found.status === 'cancelled' || !found.converged ? null : this.asFull(found);
			if (found.status === 'cancelled' || full)
				return { ...(full ?? found), evaluations: spent + (full ? 1 : 0) };
			this.inFull++;
		}
		const { lower, upper } = this.box;
		const result = leastSquares(
			this.model,
			start,
			{ ...ROUGH, lower, upper, cancelled: this.cancelled },
			this.workspace
		);
		return { ...result, evaluations: spent + result.evaluations };
	}

	/** The end of a projected descent as a point of the full problem; null where it lies outside the bounds. */
	private asFull(found: LeastSquaresResult): LeastSquaresResult | null {
		const { model, box, workspace: w } = this;
		const projected = this.projected!;
		// The last evaluation may have been a step that was not taken.
		if (
			!projected.evaluate(found.x, new Float64Array(projected.m), new Float64Array(projected.m * projected.p))
		)
			return null;
		const { x } = projected;
		if (projected.linearOutside(box)) return null;
		w.x.set(x);
		if (!model.evaluate(w.x, w.residuals[0], w.jacobians[0])) return null;
		const residuals = w.residuals[0].slice();
		const ssr = residuals.reduce((sum, r) => sum + r * r, 0);
		const { optimality } = measureSlope(model, w, 0, ssr, box);
		const activeBounds = activeBoundsAt(x, box);
		return {
			...found,
			x: x.slice(),
			residuals,
			jacobian: w.jacobians[0].slice(),
			ssr,
			optimality,
			activeBounds
		};
	}
}
