/**
 * From a finished search to the report: figures, intervals, residuals and what they mean in words.
 */
import type { FitReport } from '../../schemas/fit';
import { ENGINE_VERSION } from '../version';
import { evaluateLinear } from './affine';
import { leverages } from './covariance';
import { collectFindings } from './findings';
import type { FitContext } from './fit';
import type { LeastSquaresResult } from './least-squares';
import { massBalance } from './mass-balance';
import type { KineticProblem } from './problem';
import type { ProfileInterval } from './profile';
import { profiled } from './profiled';
import { naturalOf, reportedParameters } from './reported-parameters';
import type { SearchOutcome } from './search';
import { toReported } from './slots';
import { aicc, bic, lackOfFit, lagOne, residualRows, residualSeries, runsTest } from './statistics';
import { activeJacobian, type Uncertainty } from './uncertainty';

/** What a fit by another criterion says otherwise. */
export interface ReportChanges extends Partial<
	Pick<FitReport, 'criterion' | 'determinant' | 'residualStandardError' | 'aicc' | 'bic' | 'lackOfFit'>
> {
	/** Distance of each alternative from the best, in units of AICc. */
	deltas?: number[];
}

export function report(context: FitContext): FitReport {
	const { u, profiles } = profiled(context);
	return assembleReport(context, u, profiles);
}

/** Figures, residuals and findings of the best minimum, with its uncertainty. */
export function assembleReport(
	context: FitContext,
	u: Uncertainty,
	profiles: ProfileInterval[] | null,
	{ deltas, ...changes }: ReportChanges = {}
): FitReport {
	const { problem, model, outcome, box } = context;
	const { options } = problem.request;
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
		alternatives: alternativesOf(problem, outcome, deltas),
		residuals: residualRows(problem, model.predictions, leverage, changes.determinant ? null : u.s),
		singularValues: u.spread.singularValues,
		massBalance: massBalance(problem, best.x, options.confidenceLevel),
		findings: [],
		evaluations: outcome.evaluations,
		optimality: best.optimality,
		startsRun: outcome.startsRun,
		startsConverged: outcome.startsConverged,
		engineVersion: ENGINE_VERSION,
		seed: options.seed,
		...eliminated(problem, outcome),
		studied: studiedRange(problem, best.x),
		...changes
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

function correlationOf(u: Uncertainty, p: number): number[][] {
	const full = Array.from({ length: p }, (_, i) =>
		Array.from({ length: p }, (_, j): number => (i === j ? 1 : 0))
	);
	u.active.forEach((j, a) => u.active.forEach((k, b) => (full[j][k] = u.spread.correlation[a][b])));
	return full;
}

function alternativesOf(
	problem: KineticProblem,
	outcome: SearchOutcome,
	deltas?: number[]
): FitReport['alternatives'] {
	const best = outcome.minima[0].result.ssr;
	const n = problem.counted;
	return outcome.minima.slice(1).map(({ result, starts }, k) => ({
		parameters: Object.fromEntries(
			problem.free.map((slot, j) => [slot.id, toReported(slot, naturalOf(slot, result.x[j]))])
		),
		weightedSsr: result.ssr,
		starts,
		// The same number of parameters on the same data: only the misfit differs.
		deltaAicc: deltas ? deltas[k] : best > 0 ? n * Math.log(result.ssr / best) : Number.MAX_VALUE
	}));
}

function eliminated(
	problem: KineticProblem,
	{ elimination, inFull, startsRun }: SearchOutcome
): Pick<FitReport, 'eliminated' | 'eliminationNote'> {
	const ids = elimination.linear.map((j) => problem.free[j].id);
	const full =
		inFull > 0
			? `${inFull} of ${startsRun} starts were searched with all parameters, because an eliminated one would have left its bounds or the projected search did not settle.`
			: null;
	const note = [elimination.note, full].filter((s) => s !== null).join(' ');
	return { eliminated: inFull < startsRun ? ids : [], ...(note ? { eliminationNote: note } : {}) };
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
