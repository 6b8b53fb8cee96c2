/**
 * Quantities that people decide by, with their intervals: when a species is at its most and how much there is then, and when
 * a conversion or a level is first reached.
 *
 * Each time t* solves g(t*, θ) = 0 with g a weighted sum of values of the curve:
 *     maximum      g = y(t + δ) − y(t − δ),  δ = 10⁻⁴ t
 *     conversion   g = y(t) − (1 − X) y(0)
 *     level        g = y(t) − L
 * Delta method:    ∂t*ⱼ = −(∂g/∂θⱼ)/(∂g/∂t),  var t* = ∂t*ᵀ C ∂t*;  for y at the maximum ∂y(t*)/∂θⱼ alone (envelope).
 * Profile:         τ(t) = √(min {SSR : g(t, θ) = 0} − SSR*)/s, the interval where τ ≤ t₉₅. The constraint is one more
 *                  residual with a weight so large that it holds to 10⁻⁵ of the quantity's own standard error.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | g | `Condition`, `gap` |
 * | ∂g/∂t | `slope` |
 * | C | `RestoredFit.uncertainty` |
 *
 * Sources: Seber & Wild, Nonlinear Regression (1989) 5.1 (delta method); Bates & Watts (1988) 6.1 and Venzon & Moolgavkar,
 * Appl. Stat. 37 (1988) 87 (profiles); Nocedal & Wright, Numerical Optimization (2006) 17.1 (quadratic penalty).
 */
import type { FitReport, FitRequest } from '../../schemas/fit';
import { varianceAlong } from './covariance';
import { ConstrainedProfile } from './decision-profile';
import { CurveOfSpecies, type Condition } from './decision-curve';
import { studentQuantile } from './distributions';
import { restoreFit, type RestoredFit } from './restore';
import { runId } from './slots';

export type DecisionQuestion =
	| { kind: 'maximum'; species: string }
	/** Share of the species' own charge that is gone, 0 to 1. */
	| { kind: 'conversion'; species: string; conversion: number }
	/** In the unit of the species' curve in that run. */
	| { kind: 'level'; species: string; level: number };

export interface DecisionQuantity {
	/** Id of the run within the request. */
	run: string;
	species: string;
	quantity: 'time of maximum' | 'value at maximum' | 'time to conversion' | 'time to level';
	value: number;
	unit: string;
	/** Null where the fit determines no such error. */
	standardError: number | null;
	/** Student interval about the value. */
	interval: [number, number] | null;
	/** Profile-likelihood interval; an open end is null; null as a whole where it was not asked for or cannot be had. */
	profileInterval: [number | null, number | null] | null;
	/** Beyond the last sample of the run. */
	beyondSamples: boolean;
}

export interface DecisionOptions {
	/** 0.95 unless given. */
	confidence?: number;
	/** Profile intervals of the times as well; true unless given. */
	profiles?: boolean;
	/** How far to look, in multiples of the run's last time; 5 unless given. */
	reach?: number;
	/** Asked before every evaluation; true stops by FitCancelled. */
	cancelled?: () => boolean;
}

const conditionOf = (question: DecisionQuestion): Condition => {
	if (question.kind === 'maximum') return { kind: 'slope' };
	if (question.kind === 'conversion') return { kind: 'share', share: 1 - question.conversion };
	return { kind: 'level', level: question.level };
};

const NAMES = {
	maximum: 'time of maximum',
	conversion: 'time to conversion',
	level: 'time to level'
} as const;

/**
 * Answers questions about one run of a fit.
 * @param index place of the run in the request
 * @returns the time, and for a maximum the value too; nothing for a question whose time does not come within reach
 * @throws RangeError when report and request do not belong together, or a species or conversion is not of this fit
 */
export function decisionQuantities(
	report: FitReport,
	request: FitRequest,
	index: number,
	questions: DecisionQuestion[],
	options: DecisionOptions = {}
): DecisionQuantity[] {
	const fitted = restoreFit(report, request);
	return questions.flatMap((question) => {
		check(question, request);
		return answer({ fitted, report, request, index, question, options });
	});
}

function check(question: DecisionQuestion, request: FitRequest): void {
	if (!request.species.some((s) => s.id === question.species))
		throw new RangeError(
			`The scheme has no species ${question.species}. It has ${request.species.map((s) => s.id).join(', ')}.`
		);
	if (question.kind === 'conversion' && !(question.conversion > 0 && question.conversion < 1))
		throw new RangeError(`A conversion between 0 and 1 is expected; found ${question.conversion}.`);
}

interface Asked {
	fitted: RestoredFit;
	report: FitReport;
	request: FitRequest;
	index: number;
	question: DecisionQuestion;
	options: DecisionOptions;
}

function answer({ fitted, report, request, index, question, options }: Asked): DecisionQuantity[] {
	const run = request.runs[index];
	const curve = new CurveOfSpecies(fitted, report, run, question.species, conditionOf(question));
	const last = Math.max(0, ...run.timepoints.map((p) => p.time));
	const reach = options.reach ?? 5;
	const time = curve.firstTime(fitted.x, question.kind === 'maximum' ? last : reach * last);
	if (time === null) return [];
	const at = curve.at(fitted.x, time);
	const { s, degreesOfFreedom, active } = fitted.uncertainty;
	const confidence = options.confidence ?? 0.95;
	const t = degreesOfFreedom > 0 ? studentQuantile(0.5 + confidence / 2, degreesOfFreedom) : NaN;
	const error = (gradient: Float64Array, scale: number): number | null => {
		if (s === null) return null;
		const own = Float64Array.from(active, (j) => gradient[j] / scale);
		const found = s * Math.sqrt(varianceAlong(fitted.uncertainty.spread, own));
		return Number.isFinite(found) ? found : null;
	};
	const interval = (value: number, of: number | null): [number, number] | null =>
		of === null || !Number.isFinite(t) ? null : [value - t * of, value + t * of];
	const timeError = error(at.gapGradient, at.slope);
	const common = { run: runId(run, index), species: question.species, beyondSamples: time > last };
	const profiled =
		options.profiles !== false && timeError !== null && timeError > 0 && s !== null && s > 0
			? new ConstrainedProfile(fitted, report.weightedSsr, s, curve, options.cancelled)
			: null;
	const quantities: DecisionQuantity[] = [
		{
			...common,
			quantity: NAMES[question.kind],
			value: time,
			unit: run.timeUnit,
			standardError: timeError,
			interval: interval(time, timeError),
			profileInterval: profiled && profiled.interval(time, timeError!, t, 4 * reach * last)
		}
	];
	if (question.kind !== 'maximum') return quantities;
	const valueError = error(at.valueGradient, 1);
	quantities.push({
		...common,
		quantity: 'value at maximum',
		value: at.value,
		unit: curve.unit,
		standardError: valueError,
		interval: interval(at.value, valueError),
		profileInterval: null
	});
	return quantities;
}
