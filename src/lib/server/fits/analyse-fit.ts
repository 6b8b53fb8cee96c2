import type { FitAnswers, FitQuestion } from '$lib/schemas/fit-analysis';
import { limitEngineCalls } from '../api/limit';
import { Fit } from '../database/models';
import { AppError } from '../errors';
import { callEngine } from '../jobs/engine-calls';
import type { Actor } from '../policy';
import type { AnalysisTask, RecordedFit } from './analyse';
import source from './analysis.worker.ts?nodeworker';
import { criteriaOf } from '../studies/read-study';
import { findFitJob } from './read-fit';

/** Takes a task to a worker thread. */
export const analyseInThread = <R>(task: AnalysisTask, signal?: AbortSignal): Promise<R> =>
	callEngine<R>({ source, task, signal });

/** The stored result that questions are asked of; a fit without one has no answers. */
export async function usableFit(actor: Actor, fitId: string): Promise<RecordedFit & { record: Fit }> {
	const job = await findFitJob(actor, fitId, 'study.read', { withoutInput: true });
	const record = await Fit.findByPk(job.id);
	if (!record || record.report.status === 'failed')
		throw new AppError('wrong-state', 'This fit has no result that could be looked into.');
	return { request: record.request, report: record.report, record };
}

export interface AskFitInput {
	fitId: string;
	question: FitQuestion;
	/** When its reader goes away, the work is called off. */
	signal?: AbortSignal;
}

/** Answers a question on a recorded fit. The record stays as it is; the answer can be had again at any time. */
export async function askFit(actor: Actor, input: AskFitInput): Promise<FitAnswers[keyof FitAnswers]> {
	const { question, signal } = input;
	const { request, report, record } = await usableFit(actor, input.fitId);
	await limitEngineCalls(actor);
	const usual = question.kind === 'decisions' && !question.questions;
	const criteria = usual ? await criteriaOf(record.studyId) : [];
	return analyseInThread({ kind: 'question', fit: { request, report }, question, criteria }, signal);
}
