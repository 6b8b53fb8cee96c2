/** One question about one run of a fit, answered with errors and intervals (see `decision.ts` for formulas and sources). */
import type { FitReport, FitRequest } from '../../schemas/fit';
import type { RunContent } from '../../schemas/run';
import { varianceAlong } from './covariance';
import { CurveOfCriterion } from './criterion-curve';
import type { DecisionOptions, DecisionQuantity, DecisionQuestion } from './decision';
import { CurveOfSpecies, type Condition } from './decision-curve';
import { ConstrainedProfile } from './decision-profile';
import { studentQuantile } from './distributions';
import type { RestoredFit } from './restore';
import { runId } from './slots';
import { uncertainty } from './uncertainty';

export interface Asked {
	fitted: RestoredFit;
	report: FitReport;
	request: FitRequest;
	index: number;
	question: DecisionQuestion;
	options: DecisionOptions;
}

type Timed = Exclude<DecisionQuestion, { kind: 'criterion' | 'composition' }>;

/** How far is looked, in multiples of the run's last time. */
export const REACH = 5;

const NAMES = {
	maximum: 'time of maximum',
	conversion: 'time to conversion',
	level: 'time to level'
} as const;

const conditionOf = (question: Timed): Condition => {
	if (question.kind === 'maximum') return { kind: 'slope' };
	if (question.kind === 'conversion') return { kind: 'share', share: 1 - question.conversion };
	return { kind: 'level', level: question.level };
};

export function answerQuestion(asked: Asked): DecisionQuantity[] {
	const { question } = asked;
	const intervals = new Intervals(asked);
	if (question.kind === 'criterion') return ofCriterion(asked, intervals, question.criterion);
	if (question.kind === 'composition') return ofComposition(asked, intervals, question.time);
	return ofTime(asked, intervals, question);
}

/** Standard errors and intervals of what follows from the estimates, for one run. */
class Intervals {
	readonly run: RunContent;
	readonly last: number;
	readonly reach: number;
	private readonly t: number;

	constructor(private readonly asked: Asked) {
		const { fitted, request, index, options } = asked;
		const { degreesOfFreedom } = fitted.uncertainty;
		this.run = request.runs[index];
		this.last = Math.max(0, ...this.run.timepoints.map((p) => p.time));
		this.reach = options.reach ?? REACH;
		const confidence = options.confidence ?? 0.95;
		this.t = degreesOfFreedom > 0 ? studentQuantile(0.5 + confidence / 2, degreesOfFreedom) : NaN;
	}

	private error(gradient: Float64Array, scale: number): number | null {
		const { s, active, spread } = this.asked.fitted.uncertainty;
		if (s === null) return null;
		const own = Float64Array.from(active, (j) => gradient[j] / scale);
		const found = s * Math.sqrt(varianceAlong(spread, own));
		return Number.isFinite(found) ? found : null;
	}

	/**
	 * Parameters held by a bound that decide the answer: a tenth more or less of one moves it by more than its error without it.
	 * Such an answer has no symmetric interval, for its error would leave out what matters.
	 */
	private held(gradient: Float64Array, scale: number, error: number | null): string[] {
		const { fitted } = this.asked;
		const { active } = fitted.uncertainty;
		return fitted.problem.free.flatMap((slot, j) => {
			if (active.includes(j)) return [];
			const tenth = 0.1 * (slot.scale === 'ln' ? 1 : Math.abs(fitted.x[j]));
			return Math.abs((gradient[j] / scale) * tenth) > (error ?? Infinity) ? [slot.id] : [];
		});
	}

	/** Standard error as if no bound held, to set the scale of a profile within the bounds. */
	private freeError(gradient: Float64Array, scale: number): number | null {
		const { problem, model, x, uncertainty: u } = this.asked.fitted;
		const jacobian = new Float64Array(model.m * model.p);
		if (u.s === null || !model.evaluate(x, new Float64Array(model.m), jacobian)) return null;
		const activeBounds = new Int8Array(model.p);
		const ssr = this.asked.report.weightedSsr;
		const { spread } = uncertainty(problem, { ssr, jacobian, activeBounds });
		const found =
			u.s *
			Math.sqrt(
				varianceAlong(
					spread,
					gradient.map((g) => g / scale)
				)
			);
		return Number.isFinite(found) && found > 0 ? found : null;
	}

	private about(value: number, error: number | null): [number, number] | null {
		return error === null || !Number.isFinite(this.t)
			? null
			: [value - this.t * error, value + this.t * error];
	}

	private get common() {
		return { run: runId(this.run, this.asked.index) };
	}

	/** A time that a condition on the curve defines. */
	time(
		curve: CurveOfSpecies,
		time: number,
		named: Pick<DecisionQuantity, 'species' | 'quantity' | 'criterion' | 'note'>
	): DecisionQuantity {
		const { fitted, report, options } = this.asked;
		const at = curve.at(fitted.x, time);
		const { s } = fitted.uncertainty;
		const active = this.error(at.gapGradient, at.slope);
		const heldBy = this.held(at.gapGradient, at.slope, active);
		const error = heldBy.length ? this.freeError(at.gapGradient, at.slope) : active;
		const profiled =
			options.profiles !== false &&
			report.criterion !== 'determinant' &&
			error !== null &&
			error > 0 &&
			s !== null &&
			s > 0
				? new ConstrainedProfile(fitted, report.weightedSsr, s, curve, options.cancelled)
				: null;
		return {
			...this.common,
			...named,
			value: time,
			unit: this.run.timeUnit,
			...(heldBy.length ? { heldBy } : {}),
			standardError: heldBy.length ? null : error,
			interval: heldBy.length ? null : this.about(time, error),
			profileInterval: profiled && profiled.interval(time, error!, this.t, 4 * this.reach * this.last),
			beyondSamples: time > this.last
		};
	}

	/** An amount at a time, or at the time of a maximum. */
	amount(
		curve: CurveOfSpecies,
		time: number,
		named: Pick<DecisionQuantity, 'species' | 'quantity' | 'at'>
	): DecisionQuantity {
		const { value, valueGradient } = curve.at(this.asked.fitted.x, time);
		const active = this.error(valueGradient, 1);
		const heldBy = this.held(valueGradient, 1, active);
		const error = heldBy.length ? null : active;
		return {
			...(heldBy.length ? { heldBy } : {}),
			...this.common,
			...named,
			value,
			unit: curve.unit,
			standardError: error,
			interval: this.about(value, error),
			profileInterval: null,
			beyondSamples: time > this.last
		};
	}
}

function ofTime(asked: Asked, intervals: Intervals, question: Timed): DecisionQuantity[] {
	const { fitted, report } = asked;
	const { species } = question;
	const curve = new CurveOfSpecies(fitted, report, intervals.run, species, conditionOf(question));
	const { last, reach } = intervals;
	const time = curve.firstTime(fitted.x, question.kind === 'maximum' ? last : reach * last);
	if (time === null) return [];
	const when = intervals.time(curve, time, { species, quantity: NAMES[question.kind] });
	if (question.kind !== 'maximum') return [when];
	return [when, intervals.amount(curve, time, { species, quantity: 'value at maximum' })];
}

function ofCriterion(
	asked: Asked,
	intervals: Intervals,
	criterion: Extract<DecisionQuestion, { kind: 'criterion' }>['criterion']
): DecisionQuantity[] {
	const { fitted, report } = asked;
	const { run, reach, last } = intervals;
	const curve = new CurveOfCriterion(fitted, report, { ...run, id: runId(run, asked.index) }, criterion);
	const named = {
		species: criterion.species,
		criterion: curve.text,
		...(curve.note ? { note: curve.note } : {})
	};
	const met = curve.holdsAtStart ? null : curve.firstTime(fitted.x, reach * last);
	if (!curve.holdsAtStart && met === null) return [];
	const until = curve.firstTime(fitted.x, reach * last, met ?? 0);
	return [
		...(met === null ? [] : [intervals.time(curve, met, { ...named, quantity: 'time criterion is met' })]),
		...(until === null
			? []
			: [intervals.time(curve, until, { ...named, quantity: 'time criterion holds until' })])
	];
}

function ofComposition(asked: Asked, intervals: Intervals, time: number): DecisionQuantity[] {
	const { fitted, report, request } = asked;
	return request.species.map(({ id }) => {
		const curve = new CurveOfSpecies(fitted, report, intervals.run, id, { kind: 'level', level: 0 });
		return intervals.amount(curve, time, { species: id, quantity: 'amount at time', at: time });
	});
}

/** What a criterion does over the time that is looked at, where no crossing says it. */
export interface CriterionOutlook {
	/** "A NMT 5 % of charge" */
	criterion: string;
	holdsAtStart: boolean;
	/** Up to here was looked, in the run's time unit. */
	horizon: number;
	/** The limited quantity at the horizon, and what follows the number. */
	value: number;
	unitText: string;
	/** What a limit in area % takes as response factors; null for other limits. */
	note: string | null;
}

export function criterionOutlook(
	fitted: RestoredFit,
	report: FitReport,
	run: RunContent,
	content: Extract<DecisionQuestion, { kind: 'criterion' }>['criterion'],
	reach = REACH
): CriterionOutlook {
	const curve = new CurveOfCriterion(fitted, report, run, content);
	const horizon = reach * Math.max(0, ...run.timepoints.map((p) => p.time));
	return {
		criterion: curve.text,
		holdsAtStart: curve.holdsAtStart,
		horizon,
		value: curve.valueAt(horizon),
		unitText: curve.criterion.unitText,
		note: curve.note
	};
}
