/**
 * The fit: from a request (scheme, runs, options) to a report that a reviewer can believe.
 *
 * Order of work: compile and check → starting points → Levenberg–Marquardt from each → distinct minima → uncertainty →
 * profiles → diagnostics → findings in plain words, failures before good news.
 *
 * The whole is a pure function: same request, same seed, same engine version, same digits.
 */
import type { FitFinding, FitParameter, FitReport, FitRequest } from '../../schemas/fit';
import { ENGINE_VERSION } from '../version';
import { evaluateLinear, linearOf } from './affine';
import { watchOver } from './cancelled';
import { leverages } from './covariance';
import { studentQuantile } from './distributions';
import { structuralFindings, planIssues } from './checks';
import { identifiabilityFindings } from './identifiability';
import { collectFindings } from './findings';
import type { LeastSquaresResult } from './levenberg-marquardt';
import { norm } from './linear-algebra';
import { massBalance } from './mass-balance';
import { KineticModel } from './model';
import { compileProblem, type KineticProblem } from './problem';
import { profileIntervals, type ProfileInterval } from './profile';
import { FitCancelled, searchMinima, type Minimum, type SearchOutcome } from './search';
import { toReported, reportedFactor, type Slot } from './slots';
import { searchBox, startingPoints, type SearchBox } from './starts';
import { activeJacobian, uncertainty, type Uncertainty } from './uncertainty';
import { aicc, bic, lackOfFit, lagOne, residualRows, residualSeries, runsTest } from './statistics';

export { FitCancelled };

export interface FitProgress {
	/** What is being done now, in words. */
	stage: string;
	done: number;
	total: number;
	/** Share of the whole work that is done, 0 to 1; never goes back. */
	fraction?: number;
	/** Best weighted sum of squares so far. */
	best?: number;
}

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
	const outcome = problem.free.length > 0 ? runSearch(model, box, request, hooks) : nothingToSearch(model);
	outcome.minima = withoutPlateaus(outcome.minima, model.m);
	if (outcome.minima.length === 0) throw new FitRequestError([noFiniteStart()]);
	return report({ problem, model, box, outcome, early, hooks });
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

function runSearch(model: KineticModel, box: SearchBox, request: FitRequest, hooks: FitHooks): SearchOutcome {
	const { starts, seed } = request.options;
	const points = startingPoints(box, starts, seed);
	return searchMinima(model, box, points, {
		cancelled: hooks.cancelled,
		onStart: (done, total, best) =>
			hooks.onProgress?.({
				stage: 'searching from different starting values',
				done,
				total,
				...(Number.isFinite(best) ? { best } : {})
			})
	});
}

/** Every parameter is fixed: the report describes the curves as they are. */
function nothingToSearch(model: KineticModel): SearchOutcome {
	const residuals = new Float64Array(model.m);
	const x = new Float64Array(0);
	if (!model.evaluate(x, residuals, new Float64Array(0)))
		return { minima: [], startsRun: 1, startsConverged: 0, evaluations: 1 };
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
	return { minima: [{ result, starts: 1, firstStart: 0 }], startsRun: 1, startsConverged: 1, evaluations: 1 };
}

interface Context {
	problem: KineticProblem;
	model: KineticModel;
	box: SearchBox;
	outcome: SearchOutcome;
	early: FitFinding[];
	hooks: FitHooks;
}

/** Profile intervals, and a better optimum where a profile finds one: then search and profiles go on from there. */
function profiled(context: Context): { u: Uncertainty; profiles: ProfileInterval[] | null } {
	const { problem, model, outcome, box, hooks } = context;
	const { options } = problem.request;
	for (let round = 0; ; round++) {
		const best = outcome.minima[0].result;
		const u = uncertainty(problem, best);
		const asked = options.profiles && u.s !== null && best.converged && problem.free.length > 0;
		if (!asked || withoutScatter(problem, best.ssr)) return { u, profiles: null };
		const { intervals, better, evaluations } = profileIntervals({
			model,
			box,
			best,
			uncertainty: u,
			confidence: options.confidenceLevel,
			cancelled: hooks.cancelled,
			onParameter: (done, total) =>
				hooks.onProgress?.({ stage: 'profile-likelihood intervals', done, total, best: best.ssr })
		});
		outcome.evaluations += evaluations;
		if (!better || round === 3) return { u, profiles: better ? null : intervals };
		const polished = searchMinima(model, box, [better], { cancelled: hooks.cancelled });
		outcome.evaluations += polished.evaluations;
		outcome.minima.unshift({ ...polished.minima[0], starts: 0 });
	}
}

/** Data made without scatter (or copied from a curve): what is left is rounding, and no interval means anything. */
export function withoutScatter(problem: KineticProblem, ssr: number): boolean {
	let size = 0;
	for (const p of problem.points) size += (p.observed / p.sigma) ** 2;
	return ssr <= 1e-18 * size;
}

function report(context: Context): FitReport {
	const { problem, model, outcome, box } = context;
	const { options } = problem.request;
	const { u, profiles } = profiled(context);
	const best = outcome.minima[0].result;
	model.evaluate(best.x, new Float64Array(model.m), new Float64Array(model.m * model.p));
	const m = problem.points.length;
	const leverage = leverages(activeJacobian(best.jacobian, u.active, m), m, u.active.length, u.spread);
	const series = residualSeries(problem, best.residuals);
	const n = problem.counted;
	const p = problem.free.length;
	const base: FitReport = {
		status: best.converged ? 'converged' : 'not converged',
		message: statusMessage(best, outcome),
		parameters: reportedParameters(problem, best, u, profiles),
		fittedIds: problem.free.map((f) => f.id),
		correlation: correlationOf(u, p),
		covariance: u.covariance,
		scales: problem.free.map((f) => f.scale),
		weightedSsr: best.ssr,
		residualStandardError: u.s,
		pointsUsed: n,
		pointsCensored: problem.censored,
		degreesOfFreedom: u.degreesOfFreedom,
		aicc: aicc(n, p, best.ssr),
		bic: bic(n, p, best.ssr),
		lackOfFit: lackOfFit(problem, best.ssr, n, options.confidenceLevel),
		runsTest: runsTest(series),
		lag1: lagOne(series),
		alternatives: alternativesOf(problem, outcome),
		residuals: residualRows(problem, model.predictions, leverage, u.s),
		singularValues: u.spread.singularValues,
		massBalance: massBalance(problem, best.x, options.confidenceLevel),
		findings: [],
		evaluations: outcome.evaluations,
		optimality: best.optimality,
		startsRun: outcome.startsRun,
		startsConverged: outcome.startsConverged,
		engineVersion: ENGINE_VERSION,
		seed: options.seed,
		studied: studiedRange(problem, best.x)
	};
	base.findings = collectFindings({
		report: base,
		problem,
		model,
		best,
		uncertainty: u,
		profiles,
		outcome,
		early: context.early,
		box
	});
	return base;
}

function statusMessage(best: LeastSquaresResult, outcome: SearchOutcome): string {
	const found = `${outcome.startsConverged} of ${outcome.startsRun} starts converged; ${outcome.minima[0].starts} reached the reported minimum.`;
	return best.converged
		? `Converged. ${found}`
		: `Not converged (${best.status === 'evaluations' ? 'the limit on evaluations was reached' : best.status}). ${found}`;
}

const naturalOf = (slot: Slot, value: number): number => (slot.scale === 'ln' ? Math.exp(value) : value);

function reportedParameters(
	problem: KineticProblem,
	best: LeastSquaresResult,
	u: Uncertainty,
	profiles: ProfileInterval[] | null
): FitParameter[] {
	const t =
		u.degreesOfFreedom > 0
			? studentQuantile(0.5 + problem.request.options.confidenceLevel / 2, u.degreesOfFreedom)
			: NaN;
	return [...problem.slots.values()]
		.filter((slot) => slot.reported)
		.map((slot) => {
			const linear = linearOf(problem.slots, problem.free, slot.id);
			const inner = evaluateLinear(linear, best.x);
			const natural = slot.state === 'fixed' ? slot.value : naturalOf(slot, inner);
			const estimate = toReported(slot, natural);
			const root = linear.terms[0];
			const free = root ? root.free : -1;
			const held = free >= 0 && best.activeBounds[free] !== 0;
			const innerError = free >= 0 && !held ? Math.abs(root.coefficient) * u.errors[free] : NaN;
			const scale = slot.scale === 'ln' ? estimate : reportedFactor(slot);
			const error = Number.isFinite(innerError) ? Math.abs(scale) * innerError : null;
			const profile = profiles && free >= 0 ? profiles[free] : null;
			return {
				id: slot.id,
				estimate,
				standardError: error,
				ci95: error === null || !Number.isFinite(t) ? null : [estimate - t * error, estimate + t * error],
				profileCi95: profile ? reportedProfile(slot, linear, profile) : null,
				unit: slot.unit,
				state: held && slot.state === 'fitted' ? 'at bound' : slot.state,
				...(slot.scale === 'ln' && free >= 0
					? { logStandardError: Number.isFinite(innerError) ? innerError : null }
					: {})
			} satisfies FitParameter;
		});
}

function reportedProfile(
	slot: Slot,
	linear: { constant: number; terms: { free: number; coefficient: number }[] },
	profile: ProfileInterval
): [number | null, number | null] {
	const end = (value: number | null) =>
		value === null
			? null
			: toReported(slot, naturalOf(slot, linear.constant + linear.terms[0].coefficient * value));
	return [end(profile.lower), end(profile.upper)];
}

function correlationOf(u: Uncertainty, p: number): number[][] {
	const full = Array.from({ length: p }, (_, i) =>
		Array.from({ length: p }, (_, j): number => (i === j ? 1 : 0))
	);
	u.active.forEach((j, a) => u.active.forEach((k, b) => (full[j][k] = u.spread.correlation[a][b])));
	return full;
}

function alternativesOf(problem: KineticProblem, outcome: SearchOutcome): FitReport['alternatives'] {
	const best = outcome.minima[0].result.ssr;
	const n = problem.counted;
	return outcome.minima.slice(1).map(({ result, starts }) => ({
		parameters: Object.fromEntries(
			problem.free.map((slot, j) => [slot.id, toReported(slot, naturalOf(slot, result.x[j]))])
		),
		weightedSsr: result.ssr,
		starts,
		// The same number of parameters on the same data: only the misfit differs.
		deltaAicc: best > 0 ? n * Math.log(result.ssr / best) : Number.MAX_VALUE
	}));
}

function studiedRange(problem: KineticProblem, x: ArrayLike<number>): FitReport['studied'] {
	const temperatures = problem.runs.flatMap((r) =>
		r.log ? Array.from(r.log.temperaturesK) : [r.temperatureK]
	);
	const charge: Record<string, [number, number]> = {};
	problem.species.forEach((species, i) => {
		const amounts = problem.runs.map((r) => evaluateLinear(r.charge[i], x));
		if (amounts.some((a) => a !== 0)) charge[species] = [Math.min(...amounts), Math.max(...amounts)];
	});
	return {
		temperatureC: [Math.min(...temperatures) - 273.15, Math.max(...temperatures) - 273.15],
		chargeMolPerL: charge,
		lastTimeH: Math.max(...problem.runs.map((r) => (r.timesS[r.timesS.length - 1] ?? 0) / 3600))
	};
}
