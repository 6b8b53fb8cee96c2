/**
 * Does each constant follow its energy? The same runs fitted once more with a constant of its own in every run, beside k(T) of the fit.
 *
 *     local:   ln k_run free in each run           shared:  ln k(T) = ln k_ref − (E/R)(1/T − 1/T_ref)
 *     F = [(SSR_shared − SSR_local)/(p_local − p_shared)]/[SSR_local/(n − p_local)]
 *     line through the local constants: weighted by 1/se², ln k (Eyring: ln(k/T)) against 1/T
 *
 * The one-stage fit remains the answer; this shows whether one run, or the law itself, is at odds with it.
 *
 * Sources: Bates & Watts (1988) 3.10 (extra sum of squares); Draper & Smith, Applied Regression Analysis, 1.4 and 9.2.
 */
import type { FitFinding, FitReport, FitRequest } from '../../schemas/fit';
import { evaluateLinear, linearOf } from './affine';
import { watchOver } from './cancelled';
import { fUpper, studentQuantile } from './distributions';
import type { FitHooks } from './fit';
import { lnConstant, localProblem, startFrom, withEnergies } from './local-refit';
import { energyOf, hasLocalConstants } from './local-slots';
import { KineticModel } from './model';
import type { KineticProblem } from './problem';
import { requireLeastSquares, restoreFit } from './restore';
import type { RunModel } from './run-model';
import { searchMinima } from './search';
import { fromReported, toReported, type Slot } from './slots';
import { searchBox } from './starts';
import { temperatureLine } from './straight-line';
import { uncertainty } from './uncertainty';
import { figure } from './words';

export interface LocalConstant {
	/** Id of the run within the request. */
	run: string;
	temperatureC: number;
	/** Constant of this run alone, at its temperature, in the constant's unit. */
	estimate: number;
	/** Standard error of its natural logarithm; null where the run does not determine it. */
	logStandardError: number | null;
	/** t interval, from that of the logarithm. */
	interval: [number, number] | null;
	/** k(T) of the fit at this temperature. */
	shared: number;
	/** (ln local − ln shared)/standard error of ln local. */
	deviation: number | null;
}

export interface ConstantCheck {
	/** Shared id: `s1.forward.kRef`. */
	of: string;
	unit: string;
	form: 'arrhenius' | 'eyring' | 'van t Hoff';
	points: LocalConstant[];
	/** Energy from the line through the local constants, kJ/mol; null for fewer than three different temperatures. */
	line: { energyKJPerMol: number; standardError: number; interval: [number, number] } | null;
	/** Energy of the fit, kJ/mol. */
	sharedEnergyKJPerMol: number | null;
}

export interface ArrheniusCheck {
	constants: ConstantCheck[];
	/** Whether constants of their own describe the data better than chance would let them; null without degrees of freedom. */
	test: { f: number; df1: number; df2: number; p: number } | null;
	findings: FitFinding[];
}

/**
 * @param report a fit with shared constants that have energies, over runs at two temperatures or more
 * @throws RangeError in words where there is nothing to check; FitCancelled
 */
export function arrheniusCheck(report: FitReport, request: FitRequest, hooks: FitHooks = {}): ArrheniusCheck {
	if (hasLocalConstants(report))
		throw new RangeError(
			'The constants of this fit are local to each run already. Check a fit with shared ones.'
		);
	requireLeastSquares(report, 'This check');
	const { problem: shared, x } = restoreFit(report, request);
	const ids = withEnergies(shared);
	const temperatures = new Set(shared.runs.map((r) => r.temperatureK));
	if (ids.length === 0 || temperatures.size < 2)
		throw new RangeError(
			'A check of the temperature dependence needs runs at two temperatures or more and a fitted constant with an energy.'
		);
	const local = localProblem(request, ids);
	const model = new KineticModel(local);
	model.watch = watchOver(hooks.cancelled);
	hooks.onProgress?.({ stage: 'constants of each run alone', done: 0, total: 1, fraction: 0 });
	const start = startFrom(local, shared, x);
	const { minima } = searchMinima(model, searchBox(local), [start], { cancelled: hooks.cancelled });
	if (!minima.length) throw new RangeError('The curves cannot be computed with a constant for each run.');
	hooks.onProgress?.({ stage: 'constants of each run alone', done: 1, total: 1, fraction: 1 });
	const best = minima[0].result;
	const u = uncertainty(local, best);
	const t =
		u.degreesOfFreedom > 0
			? studentQuantile(0.5 + request.options.confidenceLevel / 2, u.degreesOfFreedom)
			: NaN;
	const constants = ids.map((id) =>
		checkOf(id, { shared, local, x, best: best.x, errors: u.errors, t, report })
	);
	const test = extraSumOfSquares(report, best.ssr, local);
	return { constants, test, findings: remarks(constants, test) };
}

interface Pieces {
	shared: KineticProblem;
	local: KineticProblem;
	/** Estimates of the shared fit and of the local one. */
	x: Float64Array;
	best: Float64Array;
	/** Standard errors of the local estimates. */
	errors: number[];
	t: number;
	report: FitReport;
}

function checkOf(id: string, pieces: Pieces): ConstantCheck {
	const { shared, local, report } = pieces;
	const slot = shared.slots.get(id)!;
	const points = local.runs.flatMap((run, index): LocalConstant[] => {
		const own = [...local.slots.values()].find((s) => s.localOf === id && s.run === run.id);
		return own ? [pointOf(own, run, shared.runs[index], pieces)] : [];
	});
	const energy = energyOf(slot.tie ? shared.slots.get(slot.tie.to)! : slot, shared.slots);
	const joules = energy && (report.parameters.find((p) => p.id === energy.id)?.estimate ?? null);
	const form = formOf(id, shared);
	return {
		of: id,
		unit: slot.unit,
		form,
		points,
		line: lineThrough(points, form, shared.request.options.confidenceLevel),
		sharedEnergyKJPerMol: energy
			? (joules === null || joules === undefined ? energy.value : fromReported(energy, joules)) / 1000
			: null
	};
}

function pointOf(own: Slot, run: RunModel, sharedRun: RunModel, pieces: Pieces): LocalConstant {
	const { local, best, errors, t, x } = pieces;
	const linear = linearOf(local.slots, local.free, own.id);
	const ln = evaluateLinear(linear, best);
	const free = linear.terms[0]?.free ?? -1;
	const error = free >= 0 && Number.isFinite(errors[free]) ? errors[free] : null;
	const gap = lnConstant(run, own.localOf!, best) - lnConstant(sharedRun, own.localOf!, x);
	const at = (value: number) => toReported(own, Math.exp(value));
	return {
		run: run.id,
		temperatureC: run.temperatureK - 273.15,
		estimate: at(ln),
		logStandardError: error,
		interval: error === null || !Number.isFinite(t) ? null : [at(ln - t * error), at(ln + t * error)],
		shared: at(ln - gap),
		deviation: error === null || !(error > 0) ? null : gap / error
	};
}

function formOf(id: string, { network }: KineticProblem): ConstantCheck['form'] {
	if (id.endsWith('.equilibriumConstant')) return 'van t Hoff';
	const [stepId, sense] = id.split('.');
	const step = network.steps.find((s) => s.id === stepId);
	const law = sense === 'reverse' ? step?.reverse : step?.forward;
	return law?.form === 'eyring' ? 'eyring' : 'arrhenius';
}

function lineThrough(
	points: LocalConstant[],
	form: ConstantCheck['form'],
	confidence: number
): ConstantCheck['line'] {
	const known = points.filter((p) => p.logStandardError !== null && p.logStandardError > 0 && p.estimate > 0);
	if (new Set(known.map((p) => p.temperatureC)).size < 3) return null;
	const { energyJPerMol, energyError, line } = temperatureLine(
		known.map((p) => p.temperatureC + 273.15),
		known.map((p) => p.estimate),
		form === 'eyring' ? 'eyring' : 'arrhenius',
		known.map((p) => 1 / p.logStandardError! ** 2)
	);
	const half = studentQuantile(0.5 + confidence / 2, line.degreesOfFreedom) * energyError;
	return {
		energyKJPerMol: energyJPerMol / 1000,
		standardError: energyError / 1000,
		interval: [(energyJPerMol - half) / 1000, (energyJPerMol + half) / 1000]
	};
}

function extraSumOfSquares(
	report: FitReport,
	localSsr: number,
	local: KineticProblem
): ArrheniusCheck['test'] {
	const df1 = local.free.length - report.fittedIds.length;
	const df2 = local.counted - local.free.length;
	if (df1 < 1 || df2 < 1 || !(localSsr > 0)) return null;
	const f = Math.max(0, report.weightedSsr - localSsr) / df1 / (localSsr / df2);
	return { f, df1, df2, p: fUpper(f, df1, df2) };
}

function remarks(constants: ConstantCheck[], test: ArrheniusCheck['test']): FitFinding[] {
	const far = constants.flatMap(({ of, points }) =>
		points.filter((p) => Math.abs(p.deviation ?? 0) > 3).map((p) => ({ of, ...p }))
	);
	const findings: FitFinding[] = [];
	if (test && test.p < 0.05)
		findings.push({
			code: 'temperature-law-strained',
			level: 'caution',
			message: `A constant of its own in each run describes the data better than chance would let it (F ${figure(test.f)} on ${test.df1} and ${test.df2}, p ${figure(test.p)}): one run is off its stated temperature, or a constant does not follow its energy over this range.`
		});
	if (far.length)
		findings.push({
			code: 'run-off-the-line',
			level: 'caution',
			message: `${far.map((p) => `${p.of} in run ${p.run} lies ${figure(Math.abs(p.deviation!), 2)} standard errors ${p.deviation! > 0 ? 'above' : 'below'} the fit`).join('; ')}. Look at the temperature record of ${far.length === 1 ? 'that run' : 'those runs'}.`,
			parameters: [...new Set(far.map((p) => p.of))],
			runs: [...new Set(far.map((p) => p.run))]
		});
	return findings;
}
