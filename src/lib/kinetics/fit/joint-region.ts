/**
 * Joint confidence region of two parameters: where both may lie together, all others fitted again.
 *
 *     {θ : SSR(θ) ≤ SSR_min (1 + 2 F(2, n − p)/(n − p))}
 *
 * The edge is followed on rays from the estimates in the coordinates of the linear ellipse (Cholesky factor of the covariance),
 * each crossing by a bracketed search on the exact re-optimised misfit. Where a ray meets a bound of the search first, the
 * region is open there.
 *
 * Source: Bates & Watts (1988) 6.1.2 and 6.2; Box & Hunter (1962).
 */
import type { FitReport, FitRequest } from '../../schemas/fit';
import { watchOver } from './cancelled';
import { fQuantile } from './distributions';
import type { FitHooks } from './fit';
import { LeastSquaresWorkspace } from './least-squares';
import { leastSquares } from './levenberg-marquardt';
import { oneStage } from './progress';
import { requireLeastSquares, restoreFit, type RestoredFit } from './restore';
import { FitCancelled } from './search';
import { toReported, type Slot } from './slots';
import { searchBox, type SearchBox } from './starts';

export interface JointRegion {
	ids: [string, string];
	units: [string, string];
	estimate: [number, number];
	/** Edge in reported units, in order round the estimate; `open` where the search's bound was met instead. */
	edge: { at: [number, number]; open: boolean }[];
	/** The ellipse of the linear approximation, for comparison. */
	ellipse: [number, number][];
	confidence: number;
}

/**
 * @param ids two fitted parameters
 * @throws RangeError when either is not fitted, is at a bound or is not determined; FitCancelled
 */
export function jointRegion(
	report: FitReport,
	request: FitRequest,
	ids: [string, string],
	options: { confidence?: number; rays?: number } = {},
	hooks: FitHooks = {}
): JointRegion {
	requireLeastSquares(report, 'A joint region');
	const fitted = restoreFit(report, request);
	fitted.model.watch = watchOver(hooks.cancelled);
	const pair = ids.map((id) => report.fittedIds.indexOf(id)) as [number, number];
	const { covariance, degreesOfFreedom, errors } = fitted.uncertainty;
	const known = pair.every((j) => j >= 0 && Number.isFinite(errors[j]) && errors[j] > 0);
	if (!known || pair[0] === pair[1])
		throw new RangeError(
			`A joint region needs two different fitted and determined parameters; found ${ids.join(' and ')}.`
		);
	const { confidence = 0.95, rays = 40 } = options;
	const radius = Math.sqrt(2 * fQuantile(confidence, 2, degreesOfFreedom));
	const tracer = new EdgeTracer(fitted, report.weightedSsr, pair, radius, hooks);
	const [i, j] = pair;
	const a = Math.sqrt(covariance[i][i]);
	const b = covariance[j][i] / a;
	const c = Math.sqrt(Math.max(covariance[j][j] - b * b, 0));
	const slots = pair.map((k) => fitted.problem.free[k]) as [Slot, Slot];
	const report2 = (u: number, v: number): [number, number] => [natural(slots[0], u), natural(slots[1], v)];
	const edge: JointRegion['edge'] = [];
	const ellipse: [number, number][] = [];
	for (let k = 0; k < rays; k++) {
		const angle = (2 * Math.PI * k) / rays;
		const direction: [number, number] = [a * Math.cos(angle), b * Math.cos(angle) + c * Math.sin(angle)];
		const { length, open } = tracer.crossing(direction);
		edge.push({
			at: report2(fitted.x[i] + length * direction[0], fitted.x[j] + length * direction[1]),
			open
		});
		ellipse.push(report2(fitted.x[i] + radius * direction[0], fitted.x[j] + radius * direction[1]));
		hooks.onProgress?.(oneStage('joint region', k + 1, rays));
	}
	return {
		ids,
		units: [slots[0].unit, slots[1].unit],
		estimate: report2(fitted.x[i], fitted.x[j]),
		edge,
		ellipse,
		confidence
	};
}

const natural = (slot: Slot, x: number): number => toReported(slot, slot.scale === 'ln' ? Math.exp(x) : x);

class EdgeTracer {
	private readonly workspace: LeastSquaresWorkspace;
	private readonly box: SearchBox;
	private readonly lower: Float64Array;
	private readonly upper: Float64Array;
	private readonly last: Float64Array;

	constructor(
		private readonly fitted: RestoredFit,
		private readonly best: number,
		private readonly pair: [number, number],
		private readonly radius: number,
		private readonly hooks: FitHooks
	) {
		const { model, problem } = fitted;
		this.workspace = new LeastSquaresWorkspace(model.m, model.p);
		this.box = searchBox(problem);
		this.lower = this.box.lower.slice();
		this.upper = this.box.upper.slice();
		this.last = fitted.x.slice();
	}

	/** Length along a ray (in units of `direction`) at which √(ΔSSR)/s reaches the radius. */
	crossing(direction: [number, number]): { length: number; open: boolean } {
		this.last.set(this.fitted.x);
		const limit = this.limit(direction);
		let low = 0;
		let lowValue = 0;
		let high = Math.min(this.radius, limit);
		let highValue = this.tau(direction, high);
		while (highValue < this.radius) {
			if (high >= limit) return { length: limit, open: true };
			[low, lowValue] = [high, highValue];
			high = Math.min(high * 1.6, limit);
			highValue = this.tau(direction, high);
		}
		for (let k = 0; k < 12 && highValue - lowValue > 0; k++) {
			let next = low + ((this.radius - lowValue) * (high - low)) / (highValue - lowValue);
			if (k % 4 === 3) next = 0.5 * (low + high);
			const value = this.tau(direction, next);
			if (Math.abs(value - this.radius) <= 1e-5 * this.radius) return { length: next, open: false };
			if (value < this.radius) [low, lowValue] = [next, value];
			else [high, highValue] = [next, value];
		}
		return { length: 0.5 * (low + high), open: false };
	}

	private limit(direction: [number, number]): number {
		let limit = Infinity;
		this.pair.forEach((j, k) => {
			const d = direction[k];
			const bound = d > 0 ? this.box.upper[j] : this.box.lower[j];
			if (d !== 0) limit = Math.min(limit, (bound - this.fitted.x[j]) / d);
		});
		return limit;
	}

	private tau(direction: [number, number], length: number): number {
		const { fitted, pair, lower, upper, box, last, hooks } = this;
		lower.set(box.lower);
		upper.set(box.upper);
		pair.forEach((j, k) => {
			lower[j] = upper[j] = last[j] = fitted.x[j] + length * direction[k];
		});
		const options = {
			lower,
			upper,
			ftol: 1e-10,
			xtol: 1e-7,
			maxEvaluations: 120,
			cancelled: hooks.cancelled
		};
		const result = leastSquares(fitted.model, last, options, this.workspace);
		if (result.status === 'cancelled') throw new FitCancelled();
		if (Number.isFinite(result.ssr)) last.set(result.x);
		return Math.sqrt(Math.max(0, result.ssr - this.best)) / (fitted.uncertainty.s ?? NaN);
	}
}
