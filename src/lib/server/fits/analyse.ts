/**
 * The computations behind the questions on a recorded fit. Pure, so that they run in a worker thread and in a test alike.
 */
import {
	bootstrap,
	compareSchemes,
	confirmationRun,
	jointRegion,
	leaveOneRunOut,
	predict,
	profileCurves,
	samplingPlan,
	withExcludedValues,
	type ComparedScheme,
	type Comparison,
	type FitHooks,
	type SamplingPlan
} from '$lib/kinetics/fit';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import type {
	ConfirmedPrediction,
	FitAnswers,
	FitQuestion,
	SamplingQuestion
} from '$lib/schemas/fit-analysis';
import type { RunContent } from '$lib/schemas/run';

export interface RecordedFit {
	request: FitRequest;
	report: FitReport;
}

export type AnalysisTask =
	| { kind: 'question'; fit: RecordedFit; question: FitQuestion }
	| { kind: 'confirmation'; fit: RecordedFit; run: RunContent; times: number[] }
	| { kind: 'comparison'; schemes: ComparedScheme[] };

function plan({ request, report }: RecordedFit, question: SamplingQuestion): SamplingPlan {
	const run = request.runs.find((r, i) => (r.id ?? `r${i + 1}`) === question.run);
	if (!run) throw new RangeError(`The fit has no run ${question.run}.`);
	const { samples, earliest, latest, minimumGap, windows, channels } = question;
	return samplingPlan(request, report, run, {
		samples,
		earliest,
		latest,
		minimumGap,
		...(windows.length ? { windows } : {}),
		...(channels.length ? { channels } : {})
	});
}

function answer(fit: RecordedFit, question: FitQuestion, hooks: FitHooks): FitAnswers[keyof FitAnswers] {
	const { report, request } = fit;
	const confidence = request.options.confidenceLevel;
	switch (question.kind) {
		case 'influence':
			return leaveOneRunOut(report, request, hooks);
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
		case 'sampling':
			return plan(fit, question);
	}
}

export function analyse(task: AnalysisTask, hooks: FitHooks = {}): unknown {
	if (task.kind === 'comparison') return compareSchemes(task.schemes) satisfies Comparison;
	if (task.kind === 'question') return answer(task.fit, task.question, hooks);
	const { report, request } = task.fit;
	const only = task.run.channels.map((c) => c.id);
	return {
		confirmation: confirmationRun(report, request, task.run),
		curves: predict(report, request, task.run, task.times, { only, foreign: true })
	} satisfies ConfirmedPrediction;
}
