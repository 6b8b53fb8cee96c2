import { Op } from 'sequelize';
import type { FitReport } from '$lib/schemas/fit';
import type { JobProgress, JobStatus } from '$lib/schemas/job';
import { Fit, Job, Run, User } from '../database/models';
import { withInputs } from '../jobs/inputs';
import { isId } from '../ids';
import type { Actor } from '../policy';
import { findStudy } from '../studies/find';
import { changesSince, type ComparableFit } from './changes';
import { fitLine } from './line';
import type { FitJobInput } from './start-fit';

export interface FitSummary {
	id: string;
	number: number | null;
	status: JobStatus;
	/** How the search ended; null until it has. */
	outcome: FitReport['status'] | null;
	progress: JobProgress | null;
	error: string | null;
	schemeId: string;
	schemeName: string;
	schemeNumber: number;
	runs: { id: string; number: number; name: string; revision: number }[];
	superseded: boolean;
	fitted: number;
	pointsUsed: number | null;
	weightedSsr: number | null;
	residualStandardError: number | null;
	degreesOfFreedom: number | null;
	aicc: number | null;
	bic: number | null;
	line: string;
	/** What this fit has that the one begun before it had not. */
	changes: string[];
	createdBy: string;
	createdAt: Date;
	startedAt: Date | null;
	finishedAt: Date | null;
}

const LIMIT = 100;

function figuresOf(report: FitReport | undefined) {
	return {
		outcome: report?.status ?? null,
		fitted: report?.fittedIds.length ?? 0,
		pointsUsed: report?.pointsUsed ?? null,
		weightedSsr: report?.weightedSsr ?? null,
		residualStandardError: report?.residualStandardError ?? null,
		degreesOfFreedom: report?.degreesOfFreedom ?? null,
		aicc: report?.aicc ?? null,
		bic: report?.bic ?? null
	};
}

function lineOf(job: Job, fit: Fit | undefined): string {
	if (fit) return fitLine(fit.report, (job.input as FitJobInput).request);
	if (job.status === 'failed') return job.error ?? 'failed';
	return job.status;
}

function comparable(job: Job, fits: Map<string, Fit>): ComparableFit {
	const { scheme, runs, request } = job.input as FitJobInput;
	return { scheme, runs, request, engineVersion: fits.get(job.id)?.report.engineVersion ?? null };
}

/** Every fit of a study that was ever begun, newest first: none is hidden, whatever came of it. */
export async function listFits(
	actor: Actor,
	studyId: string,
	options: { after?: string; limit?: number } = {}
): Promise<FitSummary[]> {
	const study = await findStudy(actor, studyId, 'study.read');
	const jobs = await Job.findAll({
		where: {
			studyId: study.id,
			kind: 'fit',
			...(isId(options.after) ? { id: { [Op.lt]: options.after } } : {})
		},
		order: [['id', 'DESC']],
		limit: Math.min(Math.max(options.limit ?? LIMIT, 1), LIMIT)
	});
	await withInputs(jobs);
	const [fits, runs, people] = await Promise.all([
		Fit.findAll({
			where: { id: jobs.map((j) => j.id) },
			attributes: ['id', 'number', 'report', 'finishedAt']
		}),
		Run.findAll({ where: { studyId: study.id }, attributes: ['id', 'currentRevisionId'] }),
		User.findAll({ where: { id: [...new Set(jobs.map((j) => j.createdById))] }, attributes: ['id', 'name'] })
	]);
	const fitOf = new Map(fits.map((fit) => [fit.id, fit]));
	const current = new Map(runs.map((run) => [run.id, run.currentRevisionId]));
	const names = new Map(people.map((p) => [p.id, p.name]));
	return jobs.map((job, place) => {
		const before = jobs.at(place + 1);
		const input = job.input as FitJobInput;
		const fit = fitOf.get(job.id);
		return {
			id: job.id,
			number: fit?.number ?? null,
			status: job.status,
			progress: (job.progress as JobProgress | null) ?? null,
			error: job.error,
			schemeId: input.scheme.id,
			schemeName: input.scheme.name,
			schemeNumber: input.scheme.number,
			runs: input.runs.map(({ id, number, name, revision }) => ({ id, number, name, revision })),
			superseded: input.runs.some((r) => current.has(r.id) && current.get(r.id) !== r.revisionId),
			...figuresOf(fit?.report),
			line: lineOf(job, fit),
			changes: changesSince(before ? comparable(before, fitOf) : null, comparable(job, fitOf)),
			createdBy: names.get(job.createdById) ?? 'somebody who has left',
			createdAt: job.createdAt,
			startedAt: job.startedAt,
			finishedAt: fit?.finishedAt ?? job.finishedAt
		};
	});
}
