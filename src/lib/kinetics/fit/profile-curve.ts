/**
 * The profile of every estimated parameter as points to draw: τ over the parameter, all others fitted again.
 *
 *     τ(θ) = ±√((SSR(θ) − SSR_min)/s²)
 *
 * A straight line means that the parameter behaves as in a linear model; a branch that flattens before it reaches t(n − p)
 * that the data do not limit it there.
 *
 * Source: Bates & Watts (1988) 6.1.
 */
import type { FitReport, FitRequest } from '../../schemas/fit';
import { studentQuantile } from './distributions';
import type { FitHooks } from './fit';
import { Profiler } from './profile';
import { requireLeastSquares, restoreFit } from './restore';
import { toReported, type Slot } from './slots';
import { searchBox } from './starts';

export interface ProfileCurve {
	id: string;
	unit: string;
	/** Ascending in `value`, in reported units. */
	points: { value: number; tau: number }[];
	/** |τ| at the interval's ends. */
	limit: number;
	estimate: number;
}

const STEPS = 7;
/** How far beyond the limit, in units of t, a branch is drawn. */
const BEYOND = 1.25;
/** Standard errors after which a branch that stays below the limit is cut. */
const FARTHEST = 8;

const natural = (slot: Slot, x: number): number => toReported(slot, slot.scale === 'ln' ? Math.exp(x) : x);

/**
 * @throws RangeError when report and request do not belong together; FitCancelled
 */
export function profileCurves(
	report: FitReport,
	request: FitRequest,
	confidence = 0.95,
	hooks: FitHooks = {}
): ProfileCurve[] {
	requireLeastSquares(report, 'The profile of a constant');
	const fitted = restoreFit(report, request);
	const { problem, model, uncertainty, x } = fitted;
	if (uncertainty.s === null) return [];
	const limit = studentQuantile(0.5 + confidence / 2, uncertainty.degreesOfFreedom);
	const box = searchBox(problem);
	const best = { x, ssr: report.weightedSsr };
	return problem.free.flatMap((slot, j): ProfileCurve[] => {
		const error = uncertainty.errors[j];
		if (!Number.isFinite(error) || error <= 0) return [];
		const branch = (sense: -1 | 1) => {
			const profiler = new Profiler({
				model,
				box,
				best,
				uncertainty,
				confidence,
				cancelled: hooks.cancelled
			});
			profiler.last.set(x);
			const points: { value: number; tau: number }[] = [];
			let step = (BEYOND * limit * error) / STEPS;
			let at = x[j];
			for (let k = 0; k < 4 * STEPS; k++) {
				const next = at + sense * step;
				if (next < box.lower[j] || next > box.upper[j] || Math.abs(next - x[j]) > FARTHEST * error) break;
				const tau = profiler.lowestTau(j, next, at);
				points.push({ value: natural(slot, next), tau: sense * tau });
				if (tau > BEYOND * limit || profiler.better) break;
				at = next;
				if (k >= STEPS) step *= 1.3;
			}
			return points;
		};
		const estimate = natural(slot, x[j]);
		const points = [...branch(-1), { value: estimate, tau: 0 }, ...branch(1)];
		hooks.onProgress?.({ stage: 'profiles', done: j + 1, total: problem.free.length });
		return [
			{ id: slot.id, unit: slot.unit, points: points.sort((a, b) => a.value - b.value), limit, estimate }
		];
	});
}
