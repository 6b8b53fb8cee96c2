/**
 * Fits of changed data that begin where a fit ended: without one run, with excluded values put back, on simulated values.
 *
 * Nothing is left out of a result by these: they show how much it hangs on one run, one exclusion or one error model.
 *
 * Sources: Cook & Weisberg, Residuals and Influence in Regression (1982) 3.2 (case deletion); Efron & Tibshirani, An
 * Introduction to the Bootstrap (1993) 6.5 and 13.3 (parametric bootstrap, percentile intervals).
 */
import type { FitReport, FitRequest } from '../../schemas/fit';
import { watchOver } from './cancelled';
import { fit, type FitHooks } from './fit';
import { LeastSquaresWorkspace } from './least-squares';
import { leastSquares } from './levenberg-marquardt';
import { KineticModel } from './model';
import { compileProblem } from './problem';
import { oneStage } from './progress';
import { readSlots } from './read-slots';
import { fromReported, runId, toReported, type Slot } from './slots';
import { requireLeastSquares, restoreFit } from './restore';
import { FitCancelled, searchMinima } from './search';
import { normalNumbers, uniformNumbers } from './sequence';
import { searchBox } from './starts';

const inner = (slot: Slot, reported: number): number => {
	const si = fromReported(slot, reported);
	return slot.scale === 'ln' ? Math.log(si) : si;
};
const natural = (slot: Slot, x: number): number => toReported(slot, slot.scale === 'ln' ? Math.exp(x) : x);

export interface RunInfluence {
	run: string;
	/** Estimates without this run; null where what is left cannot be fitted. */
	parameters:
		| {
				id: string;
				estimate: number;
				unit: string;
				/** Change in standard errors of the full fit. */ shift: number | null;
		  }[]
		| null;
	/** Largest |shift|. */
	largestShift: number | null;
}

/** Fits again without each run in turn. A shift beyond two standard errors says that the result hangs on that run. */
export function leaveOneRunOut(report: FitReport, request: FitRequest, hooks: FitHooks = {}): RunInfluence[] {
	requireLeastSquares(report, 'Leaving out one run at a time');
	if (request.runs.length < 2) return [];
	const named = request.runs.map((run, i) => ({ ...run, id: runId(run, i) }));
	return named.map((left, index) => {
		hooks.onProgress?.(oneStage('leaving out one run at a time', index, named.length));
		const runs = named.filter((r) => r !== left);
		const parameters = withoutRun(report, { ...request, runs, options: without(request, left.id) }, hooks);
		const shifts = parameters?.flatMap((p) => (p.shift === null ? [] : [Math.abs(p.shift)])) ?? [];
		return { run: left.id, parameters, largestShift: shifts.length ? Math.max(...shifts) : null };
	});
}

/** Options without those that name a parameter local to this run. */
function without(request: FitRequest, run: string): FitRequest['options'] {
	const { slots } = readSlots(request);
	const local = (id: string) => slots.get(id)?.run === run;
	const { options } = request;
	return {
		...options,
		fixed: options.fixed.filter((id) => !local(id)),
		tied: options.tied.filter((t) => !local(t.parameter) && !local(t.to)),
		bounds: Object.fromEntries(Object.entries(options.bounds).filter(([id]) => !local(id)))
	};
}

function withoutRun(report: FitReport, request: FitRequest, hooks: FitHooks): RunInfluence['parameters'] {
	const { problem } = compileProblem(request);
	if (!problem || problem.counted <= problem.free.length) return null;
	const known = new Map(report.parameters.map((p) => [p.id, p]));
	const box = searchBox(problem);
	const start = Float64Array.from(problem.free, (slot, j) => {
		const found = known.get(slot.id);
		return found ? inner(slot, found.estimate) : box.guess[j];
	});
	const model = new KineticModel(problem);
	model.watch = watchOver(hooks.cancelled);
	const { minima } = searchMinima(model, box, [start], { cancelled: hooks.cancelled });
	if (!minima.length || !minima[0].result.converged) return null;
	return problem.free.map((slot, j) => {
		const estimate = natural(slot, minima[0].result.x[j]);
		const full = known.get(slot.id);
		const error = full?.standardError;
		return {
			id: slot.id,
			estimate,
			unit: slot.unit,
			shift: full && error ? (estimate - full.estimate) / error : null
		};
	});
}

/** The fit as asked, and with every excluded value put back; null where nothing is excluded. */
export function withExcludedValues(request: FitRequest, hooks: FitHooks = {}): FitReport | null {
	if (!request.runs.some((r) => r.exclusions?.length)) return null;
	return fit({ ...request, runs: request.runs.map((r) => ({ ...r, exclusions: [] })) }, hooks);
}

export interface Bootstrap {
	/** Draws on the scale of estimation, in the order of `report.fittedIds`. */
	draws: Float64Array[];
	/** Percentile intervals in the reported units. */
	intervals: { id: string; unit: string; low: number; high: number }[];
	failed: number;
	seed: number;
}

/**
 * Parametric bootstrap: values simulated from the fit and its error model, each set fitted from the estimates.
 * @param options.draws 200 unless given
 * @throws RangeError when the fit has no residual standard deviation; FitCancelled
 */
export function bootstrap(
	report: FitReport,
	request: FitRequest,
	options: { draws?: number; seed?: number; confidence?: number } = {},
	hooks: FitHooks = {}
): Bootstrap {
	requireLeastSquares(report, 'Simulation of new data');
	const { problem, model, x } = restoreFit(report, request);
	const s = report.residualStandardError;
	if (s === null) throw new RangeError('Without degrees of freedom there is no scatter to simulate from.');
	const { draws: total = 200, seed = report.seed, confidence = 0.95 } = options;
	model.evaluate(x, new Float64Array(model.m), new Float64Array(model.m * model.p));
	const mean = model.predictions.slice();
	const points = problem.points.map((p) => ({ ...p }));
	const simulated = new KineticModel(problem, points);
	simulated.watch = watchOver(hooks.cancelled);
	const box = searchBox(problem);
	const workspace = new LeastSquaresWorkspace(simulated.m, simulated.p);
	const normal = normalNumbers(uniformNumbers(seed));
	const draws: Float64Array[] = [];
	let failed = 0;
	for (let d = 0; d < total; d++) {
		points.forEach((p, i) => {
			const value = mean[i] + s * p.sigma * normal();
			if (p.kind === 'value') p.observed = value;
		});
		const search = {
			lower: box.lower,
			upper: box.upper,
			ftol: 1e-10,
			xtol: 1e-8,
			cancelled: hooks.cancelled
		};
		const result = leastSquares(simulated, x, search, workspace);
		if (result.status === 'cancelled') throw new FitCancelled();
		if (result.converged) draws.push(result.x);
		else failed++;
		hooks.onProgress?.(oneStage('parametric bootstrap', d + 1, total));
	}
	return { draws, intervals: percentiles(problem.free, draws, confidence), failed, seed };
}

function percentiles(free: Slot[], draws: Float64Array[], confidence: number): Bootstrap['intervals'] {
	return free.map((slot, j) => {
		const sorted = draws.map((d) => d[j]).sort((a, b) => a - b);
		const at = (q: number) => {
			const position = q * (sorted.length - 1);
			const k = Math.min(Math.floor(position), sorted.length - 2);
			return sorted[k] + (position - k) * (sorted[k + 1] - sorted[k]);
		};
		return {
			id: slot.id,
			unit: slot.unit,
			low: natural(slot, at((1 - confidence) / 2)),
			high: natural(slot, at((1 + confidence) / 2))
		};
	});
}
