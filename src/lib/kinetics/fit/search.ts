/**
 * Many starts, few answers: descends from every starting point (`rough-search.ts`), gathers the distinct minima and polishes them.
 *
 * Two end points are the same minimum when their parameters agree, or when the misfit between them (at the midpoint) is no
 * larger than at both: then they lie in one flat valley. Everything is in a fixed order, so the same seed gives the same bits.
 */
import { FitCancelled } from './cancelled';
import type { Elimination } from './elimination';
import type { KineticModel } from './model';
import { LeastSquaresWorkspace, type LeastSquaresOptions, type LeastSquaresResult } from './least-squares';
import { leastSquares } from './levenberg-marquardt';
import { RoughSearch } from './rough-search';
import type { SearchBox } from './starts';

export { FitCancelled };

export interface Minimum {
	result: LeastSquaresResult;
	/** How many starts ended here. */
	starts: number;
	/** The first of them. */
	firstStart: number;
}

export interface SearchOutcome {
	/** Best first. */
	minima: Minimum[];
	startsRun: number;
	startsConverged: number;
	evaluations: number;
	/** Parameters that were found by linear least squares on the way, and how many descents had to do without that. */
	elimination: Elimination;
	inFull: number;
}

export interface SearchHooks {
	onStart?: (done: number, total: number, best: number) => void;
	/** After each minimum that was followed to its last digits. */
	onRefined?: (done: number, total: number, best: number) => void;
	cancelled?: () => boolean;
}

/**
 * @param model evaluated in place
 * @param starts points on the scale of estimation
 * @throws FitCancelled
 */
export function searchMinima(
	model: KineticModel,
	box: SearchBox,
	starts: Float64Array[],
	hooks: SearchHooks = {}
): SearchOutcome {
	const workspace = new LeastSquaresWorkspace(model.m, model.p);
	const cancelled = hooks.cancelled;
	const found: Minimum[] = [];
	let startsConverged = 0;
	let evaluations = 0;
	let best = Infinity;
	const common = { lower: box.lower, upper: box.upper, cancelled };
	const descent = new RoughSearch(model, box, workspace, cancelled);
	starts.forEach((start, k) => {
		const rough = descent.from(start);
		evaluations += rough.evaluations;
		if (rough.status === 'cancelled') throw new FitCancelled();
		if (rough.converged) startsConverged++;
		if (Number.isFinite(rough.ssr)) gather(model, found, rough, k, box);
		best = Math.min(best, rough.ssr);
		hooks.onStart?.(k + 1, starts.length, best);
	});
	found.sort((a, b) => a.result.ssr - b.result.ssr);
	const minima: Minimum[] = [];
	const candidates = found.slice(0, 12);
	candidates.forEach((candidate, k) => {
		const fine = refined(model, candidate.result.x, common, workspace);
		evaluations += fine.evaluations;
		if (fine.status === 'cancelled') throw new FitCancelled();
		const same = minima.find((m) => sameMinimum(model, m.result, fine, box));
		if (!same) minima.push({ ...candidate, result: fine });
		else {
			same.starts += candidate.starts;
			if (fine.ssr < same.result.ssr) same.result = fine;
		}
		best = Math.min(best, fine.ssr);
		hooks.onRefined?.(k + 1, candidates.length, best);
	});
	minima.sort((a, b) => a.result.ssr - b.result.ssr);
	const { elimination, inFull } = descent;
	return { minima, startsRun: starts.length, startsConverged, evaluations, elimination, inFull };
}

/** Evaluations of one refinement, and how often it is taken up again where they run out. */
const REFINING = 400;
const TAKEN_UP = 3;
/** Reduction within a whole refinement, relative, below which a flat valley counts as its own floor. */
const FLAT = 1e-8;

/**
 * To the last digits. In a flat valley (a direction that the data hardly show) the trust region, whose scale remembers the
 * steep ground it came over, creeps: it is taken up afresh there; and where that gains nothing any more, that is the minimum.
 */
function refined(
	model: KineticModel,
	start: ArrayLike<number>,
	common: LeastSquaresOptions,
	workspace: LeastSquaresWorkspace
): LeastSquaresResult {
	const options = { ...common, maxEvaluations: REFINING, factor: 10, polish: 6 };
	let result = leastSquares(model, start, options, workspace);
	let { evaluations } = result;
	for (let k = 0; k < TAKEN_UP && result.status === 'evaluations'; k++) {
		const before = result.ssr;
		result = leastSquares(model, result.x, options, workspace);
		evaluations += result.evaluations;
		if (result.status === 'evaluations' && before - result.ssr <= FLAT * before)
			result = { ...result, status: 'reduction', converged: true };
	}
	return { ...result, evaluations };
}

function gather(
	model: KineticModel,
	found: Minimum[],
	result: LeastSquaresResult,
	start: number,
	box: SearchBox
): void {
	for (const other of found) {
		if (!sameMinimum(model, other.result, result, box)) continue;
		other.starts++;
		if (result.ssr < other.result.ssr) other.result = result;
		return;
	}
	found.push({ result, starts: 1, firstStart: start });
}

function sameMinimum(
	model: KineticModel,
	a: LeastSquaresResult,
	b: LeastSquaresResult,
	box: SearchBox
): boolean {
	const high = Math.max(a.ssr, b.ssr);
	const low = Math.min(a.ssr, b.ssr);
	let apart = 0;
	for (let j = 0; j < model.p; j++)
		apart = Math.max(apart, Math.abs(a.x[j] - b.x[j]) / (Math.abs(box.to[j] - box.from[j]) || 1));
	if (apart < 1e-3) return true;
	if (high > low * 1.02 + 1e-300) return false;
	const middle = a.x.map((v, j) => 0.5 * (v + b.x[j]));
	const residuals = new Float64Array(model.m);
	if (!model.evaluate(middle, residuals, new Float64Array(model.m * model.p))) return false;
	let ssr = 0;
	for (let i = 0; i < model.m; i++) ssr += residuals[i] * residuals[i];
	return ssr <= high * 1.001;
}
