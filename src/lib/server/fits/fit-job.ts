import type { FitReport } from '$lib/schemas/fit';
import { appendAudit } from '../audit/append';
import type { Tx } from '../database';
import { Fit, FitRun, type Job } from '../database/models';
import { registerKind } from '../jobs/kinds';
import type { Actor } from '../policy';
import type { FitJobInput } from './start-fit';

const about = (job: Job) => ({
	groupId: job.groupId,
	studyId: job.studyId,
	objectType: 'fit',
	objectId: job.id
});

const figures = (report: FitReport) =>
	report.parameters.map(({ id, estimate, standardError, unit, state }) => ({
		id,
		estimate,
		standardError,
		unit,
		state
	}));

/** Whatever came of it is kept: a fit that did not settle is a record like any other. */
async function record(tx: Tx, job: Job, actor: Actor, report: FitReport): Promise<Record<string, unknown>> {
	const input = job.input as FitJobInput;
	const studyId = job.studyId!;
	const last = await Fit.max<number | null, Fit>('number', { where: { studyId }, transaction: tx });
	const number = (last ?? 0) + 1;
	const { engineVersion, seed } = report;
	await Fit.create(
		{
			id: job.id,
			studyId,
			groupId: job.groupId,
			number,
			schemeVersionId: input.scheme.versionId,
			request: input.request,
			inputHash: job.inputHash,
			engineVersion,
			seed,
			report,
			startedAt: job.startedAt ?? new Date(),
			finishedAt: new Date(),
			createdById: job.createdById
		},
		{ transaction: tx }
	);
	await FitRun.bulkCreate(
		input.runs.map((run, position) => ({
			fitId: job.id,
			runId: run.id,
			runRevisionId: run.revisionId,
			position
		})),
		{ transaction: tx }
	);
	await appendAudit(tx, actor, {
		type: 'fit.finished',
		payload: {
			number,
			status: report.status,
			weightedSsr: report.weightedSsr,
			pointsUsed: report.pointsUsed,
			parameters: figures(report),
			inputHash: job.inputHash,
			engineVersion,
			seed
		},
		objectVersion: number,
		...about(job)
	});
	return { number, fitStatus: report.status, weightedSsr: report.weightedSsr };
}

/** Teaches the queue what a fit is. `source` gives the worker that holds the engine. */
export function registerFits(source: () => string): void {
	registerKind('fit', {
		source,
		task: (job) => (job.input as FitJobInput).request,
		finish: (tx, job, actor, result) => record(tx, job, actor, result as FitReport),
		failed: (tx, job, actor, message) =>
			appendAudit(tx, actor, { type: 'fit.failed', payload: { message }, ...about(job) }),
		cancelled: (tx, job, actor) =>
			appendAudit(tx, actor, { type: 'fit.cancelled', payload: {}, ...about(job) })
	});
}
