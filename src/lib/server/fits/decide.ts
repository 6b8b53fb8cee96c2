/** Quantities that people decide by, worked out for one run of a recorded fit. Pure, so that it runs in a worker thread. */
import { criterionOutlook, decisionQuantities, REACH, restoreFit, type FitHooks } from '$lib/kinetics/fit';
import type { AnsweredDecision, AskedDecision, FitAnswers } from '$lib/schemas/fit-analysis';
import type { RecordedFit } from './analyse';

/** Values times fitted parameters beyond which a profile takes longer than a page should wait. */
const MOST_FOR_PROFILES = 60_000;

const plain = (x: number): string => String(Number(x.toPrecision(3)));

export interface DecisionTask {
	/** Place of the run in the request. */
	index: number;
	run: string;
	questions: AskedDecision[];
	/** Questions that nobody asked by name: one without an answer is left out. */
	usual: boolean;
	profiles: boolean;
}

/** Why a question has no time, in words. */
function whyNone(fit: RecordedFit, index: number, question: AskedDecision): string {
	const run = fit.request.runs[index];
	const unit = run.timeUnit;
	if (question.kind === 'criterion') {
		const restored = restoreFit(fit.report, fit.request);
		const look = criterionOutlook(restored, fit.report, run, question.criterion);
		const upTo = `${plain(look.horizon)} ${unit}`;
		const basis = look.note ? ` (${look.note})` : '';
		return look.holdsAtStart
			? `holds from the start and, as far as was looked (${upTo}), throughout${basis}`
			: `not met within ${upTo}; there the value is ${plain(look.value)}${look.unitText}${basis}`;
	}
	const last = Math.max(0, ...run.timepoints.map((p) => p.time));
	if (question.kind === 'maximum')
		return `no maximum within the studied time (${plain(last)} ${unit}): at its most at an end`;
	return `not reached within ${plain(REACH * last)} ${unit}`;
}

function answerOne(
	fit: RecordedFit,
	task: DecisionTask,
	question: AskedDecision,
	hooks: FitHooks,
	profiles: boolean
) {
	const { request, report } = fit;
	try {
		const quantities = decisionQuantities(report, request, task.index, [question], {
			confidence: request.options.confidenceLevel,
			profiles,
			cancelled: hooks.cancelled
		});
		const none = quantities.length ? null : whyNone(fit, task.index, question);
		return { question, quantities, none };
	} catch (caught) {
		// One criterion without a meaning for this run does not take the others with it.
		if (!(caught instanceof RangeError)) throw caught;
		return { question, quantities: [], none: caught.message };
	}
}

const isNews = ({ question, none }: AnsweredDecision): boolean =>
	none === null || question.kind === 'criterion' || question.kind === 'conversion';

export function decide(fit: RecordedFit, task: DecisionTask, hooks: FitHooks = {}): FitAnswers['decisions'] {
	const { report, request } = fit;
	const size = report.pointsUsed * Math.max(1, report.fittedIds.length);
	const profiles = task.profiles && size <= MOST_FOR_PROFILES;
	const answers = task.questions.map((q, done) => {
		hooks.onProgress?.({ stage: 'quantities', done, total: task.questions.length });
		return answerOne(fit, task, q, hooks, profiles);
	});
	return {
		run: task.run,
		timeUnit: request.runs[task.index].timeUnit,
		answers: task.usual ? answers.filter(isNews) : answers,
		profiled: profiles
	};
}
