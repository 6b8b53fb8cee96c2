/**
 * The computations behind the questions on a recorded fit. Pure, so that they run in a worker thread and in a test alike.
 */
import {
	arrheniusCheck,
	bootstrap,
	compareSchemes,
	confirmationRun,
	jointRegion,
	leaveOneRunOut,
	planSamplesFor,
	predict,
	profileCurves,
	samplingPlan,
	withExcludedValues,
	type ComparedScheme,
	type Comparison,
	type FitHooks,
	type Prediction,
	type SamplingPlan
} from '$lib/kinetics/fit';
import type { CriterionContent } from '$lib/schemas/criterion';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import type {
	ConfirmedPrediction,
	FitAnswers,
	FitQuestion,
	SamplingQuestion
} from '$lib/schemas/fit-analysis';
import type { SamplePlanRequest } from '$lib/schemas/fit-plan';
import type { RunContent } from '$lib/schemas/run';
import { decide } from './decide';
import { usualQuestions } from './decision-questions';

export interface RecordedFit {
	request: FitRequest;
	report: FitReport;
}

export type AnalysisTask =
	| { kind: 'question'; fit: RecordedFit; question: FitQuestion; criteria?: CriterionContent[] }
	| { kind: 'confirmation'; fit: RecordedFit; run: RunContent; times: number[] }
	| { kind: 'comparison'; schemes: ComparedScheme[] }
	| { kind: 'sampling'; request: SamplePlanRequest };

/** Place of a run within the request. @throws RangeError where the fit has no such run */
function placeOf(request: FitRequest, run: string): number {
	const index = request.runs.findIndex((r, i) => (r.id ?? `r${i + 1}`) === run);
	if (index < 0) throw new RangeError(`The fit has no run ${run}.`);
	return index;
}

function plan({ request, report }: RecordedFit, question: SamplingQuestion, hooks: FitHooks): SamplingPlan {
	const run = request.runs[placeOf(request, question.run)];
	const { samples, earliest, latest, minimumGap, windows, channels } = question;
	const options = {
		samples,
		earliest,
		latest,
		minimumGap,
		...(windows.length ? { windows } : {}),
		...(channels.length ? { channels } : {})
	};
	return samplingPlan(request, report, run, options, hooks);
}

function curves({ request, report }: RecordedFit, runId: string, points: number): Prediction {
	const run = request.runs[placeOf(request, runId)];
	const end = run.timepoints.reduce((last, p) => Math.max(last, p.time), 0) || 1;
	const times = Array.from({ length: points }, (_, k) => (end * k) / (points - 1));
	return predict(report, request, run, times, { only: run.channels.map((c) => c.id) });
}

function decisions(
	fit: RecordedFit,
	question: Extract<FitQuestion, { kind: 'decisions' }>,
	criteria: CriterionContent[],
	hooks: FitHooks
): FitAnswers['decisions'] {
	const index = placeOf(fit.request, question.run);
	const { run, profiles } = question;
	const questions = question.questions ?? usualQuestions(fit.request, index, criteria);
	return decide(fit, { index, run, questions, profiles, usual: !question.questions }, hooks);
}

function answer(
	fit: RecordedFit,
	question: FitQuestion,
	criteria: CriterionContent[],
	hooks: FitHooks
): FitAnswers[keyof FitAnswers] {
	const { report, request } = fit;
	const confidence = request.options.confidenceLevel;
	switch (question.kind) {
		case 'influence':
			return leaveOneRunOut(report, request, hooks);
		case 'arrhenius':
			return arrheniusCheck(report, request, hooks);
		case 'profiles':
			return profileCurves(report, request, confidence, hooks);
		case 'region':
			return jointRegion(report, request, question.parameters, { confidence }, hooks);
		case 'bootstrap': {
			const { draws, intervals, failed, seed } = bootstrap(
				report,
				request,
				{ draws: question.draws, confidence },
				hooks
			);
			return { draws: draws.length, intervals, failed, seed };
		}
		case 'excluded':
			return withExcludedValues(request, hooks);
		case 'curves':
			return curves(fit, question.run, question.points);
		case 'decisions':
			return decisions(fit, question, criteria, hooks);
		case 'sampling':
			return plan(fit, question, hooks);
	}
}

export function analyse(task: AnalysisTask, hooks: FitHooks = {}): unknown {
	if (task.kind === 'comparison') return compareSchemes(task.schemes) satisfies Comparison;
	if (task.kind === 'sampling') return planSamplesFor(task.request, hooks) satisfies SamplingPlan;
	if (task.kind === 'question') return answer(task.fit, task.question, task.criteria ?? [], hooks);
	const { report, request } = task.fit;
	const only = task.run.channels.map((c) => c.id);
	return {
		confirmation: confirmationRun(report, request, task.run),
		curves: predict(report, request, task.run, task.times, { only, foreign: true })
	} satisfies ConfirmedPrediction;
}
