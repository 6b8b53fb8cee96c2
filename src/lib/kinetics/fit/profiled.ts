/**
 * Profile intervals of a fit, and a better optimum where a profile finds one: then search and profiles go on from there.
 */
import type { FitContext } from './fit';
import type { KineticProblem } from './problem';
import { profileIntervals, type ProfileInterval } from './profile';
import { USUAL_WORK } from './progress';
import { searchMinima } from './search';
import { uncertainty, type Uncertainty } from './uncertainty';

/** `profiles` is null where none was asked for or none has a meaning. */
export function profiled(context: FitContext): { u: Uncertainty; profiles: ProfileInterval[] | null } {
	const { problem, model, outcome, box, hooks, meter } = context;
	const { options } = problem.request;
	for (let round = 0; ; round++) {
		const best = outcome.minima[0].result;
		const u = uncertainty(problem, best);
		const asked = options.profiles && u.s !== null && best.converged && problem.free.length > 0;
		if (!asked || withoutScatter(problem, best.ssr)) return { u, profiles: null };
		meter.begin('profile-likelihood intervals', USUAL_WORK.profile * model.p, USUAL_WORK.report);
		const { intervals, better, evaluations } = profileIntervals({
			model,
			box,
			best,
			uncertainty: u,
			confidence: options.confidenceLevel,
			cancelled: hooks.cancelled,
			onParameter: (done, total) => meter.step(done, total, best.ssr)
		});
		outcome.evaluations += evaluations;
		if (!better || round === 3) return { u, profiles: better ? null : intervals };
		const polished = searchMinima(model, box, [better], { cancelled: hooks.cancelled });
		outcome.evaluations += polished.evaluations;
		outcome.minima.unshift({ ...polished.minima[0], starts: 0 });
	}
}

/** Data made without scatter (or copied from a curve): what is left is rounding, and no interval means anything. */
function withoutScatter(problem: KineticProblem, ssr: number): boolean {
	let size = 0;
	for (const p of problem.points) size += (p.observed / p.sigma) ** 2;
	return ssr <= 1e-18 * size;
}
