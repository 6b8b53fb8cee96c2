/**
 * The fit: from a request (scheme, runs, options) to a report that a reviewer can believe.
 *
 * Order of work: compile and check → starting points → Levenberg–Marquardt from each → distinct minima → uncertainty →
 * profiles → diagnostics → findings in plain words, failures before good news.
 *
 * The whole is a pure function: same request, same seed, same engine version, same digits.
 */
import type { FitFinding, FitReport, FitRequest } from '../../schemas/fit';
import { watchOver } from './cancelled';
import { structuralFindings, planIssues } from './checks';
import { determinantReport } from './determinant-fit';
import { identifiabilityFindings } from './identifiability';
import type { LeastSquaresResult } from './least-squares';
import { norm } from './linear-algebra';
import { KineticModel } from './model';
import { compileProblem, type KineticProblem } from './problem';
import { ProgressMeter, USUAL_WORK, type FitProgress } from './progress';
import { report } from './report';
import { FitCancelled, searchMinima, type Minimum, type SearchOutcome } from './search';
import { searchBox, startingPoints, type SearchBox } from './starts';

export { FitCancelled };

export type { FitProgress };

export interface FitHooks {
	onProgress?: (progress: FitProgress) => void;
	/** Asked many times in every evaluation of the model; true stops the fit by FitCancelled. Must answer quickly. */
	cancelled?: () => boolean;
}

/** The request cannot be fitted as it stands; every issue says what was found and one way out. */
export class FitRequestError extends Error {
	constructor(readonly issues: FitFinding[]) {
		super(issues.map((i) => i.message).join(' '));
		this.name = 'FitRequestError';
	}
}

/**
 * Fits a request.
 * @returns the report; `status` says whether the search converged.
 * @throws FitRequestError when the request has an issue of level 'stop' (unknown parameter, missing unit, …).
 * @throws FitCancelled when `hooks.cancelled` answers true.
 */
export function fit(request: FitRequest, hooks: FitHooks = {}): FitReport {
	const { problem, issues } = compileProblem(request);
	if (!problem) throw new FitRequestError(issues.filter((i) => i.level === 'stop'));
	const early = [...issues, ...planIssues(problem)];
	const stops = early.filter((i) => i.level === 'stop');
	if (stops.length) throw new FitRequestError(stops);
	const model = new KineticModel(problem);
	model.watch = watchOver(hooks.cancelled);
	const box = searchBox(problem);
	early.push(...identifiabilityFindings(problem, box, model.watch), ...structuralFindings(problem));
	const meter = new ProgressMeter(hooks.onProgress);
	const outcome =
		problem.free.length > 0 ? runSearch(model, box, request, hooks, meter) : nothingToSearch(model);
	outcome.minima = withoutPlateaus(outcome.minima, model.m);
	if (outcome.minima.length === 0) throw new FitRequestError([noFiniteStart()]);
	const context = { problem, model, box, outcome, early, hooks, meter };
	const made =
		request.options.criterion === 'determinant' && problem.free.length > 0
			? determinantReport(context)
			: report(context);
	meter.begin('finished', 1, 0);
	meter.step(1, 1, made.weightedSsr);
	return made;
}

/**
 * Drops end points where the search ran out on flat ground (a parameter at a bound, or without any effect): they are no minima
 * and say nothing about the data, unless they fit almost as well as the best.
 */
function withoutPlateaus(minima: Minimum[], m: number): Minimum[] {
	const best = minima[0];
	if (!best) return minima;
	const length = (of: Minimum, j: number) => norm(of.result.jacobian, j * m, m);
	return minima.filter((minimum) => {
		if (minimum === best || minimum.result.ssr < best.result.ssr * 1.5) return true;
		return Array.from(minimum.result.activeBounds).every(
			(bound, j) => bound === 0 && length(minimum, j) > 1e-5 * length(best, j)
		);
	});
}

function noFiniteStart(): FitFinding {
	return {
		code: 'no-finite-start',
		level: 'stop',
		message:
			'The curves cannot be computed at any starting point. Check the units of the constants and times, and the bounds.'
	};
}

function runSearch(
	model: KineticModel,
	box: SearchBox,
	request: FitRequest,
	hooks: FitHooks,
	meter: ProgressMeter
): SearchOutcome {
	const { starts, seed, profiles } = request.options;
	const after = USUAL_WORK.report + (profiles ? USUAL_WORK.profile * model.p : 0);
	meter.begin(
		'searching from different starting values',
		USUAL_WORK.start * starts,
		USUAL_WORK.refinement + after
	);
	return searchMinima(model, box, startingPoints(box, starts, seed), {
		cancelled: hooks.cancelled,
		onStart: (done, total, best) => meter.step(done, total, best),
		onRefined: (done, total, best) => {
			if (done === 1) meter.begin('refining the minima', USUAL_WORK.refinement, after);
			meter.step(done, total, best);
		}
	});
}

/** Every parameter is fixed: the report describes the curves as they are. */
function nothingToSearch(model: KineticModel): SearchOutcome {
	const residuals = new Float64Array(model.m);
	const x = new Float64Array(0);
	const searched = { startsRun: 1, evaluations: 1, elimination: { linear: [], note: null }, inFull: 0 };
	if (!model.evaluate(x, residuals, new Float64Array(0)))
		return { ...searched, minima: [], startsConverged: 0 };
	const result: LeastSquaresResult = {
		status: 'gradient',
		converged: true,
		x,
		residuals,
		jacobian: new Float64Array(0),
		ssr: residuals.reduce((a, r) => a + r * r, 0),
		evaluations: 1,
		iterations: 0,
		optimality: 0,
		activeBounds: new Int8Array(0)
	};
	return { ...searched, minima: [{ result, starts: 1, firstStart: 0 }], startsConverged: 1 };
}

/** Everything that a finished search hands on to its report. */
export interface FitContext {
	problem: KineticProblem;
	model: KineticModel;
	box: SearchBox;
	outcome: SearchOutcome;
	early: FitFinding[];
	hooks: FitHooks;
	meter: ProgressMeter;
}
