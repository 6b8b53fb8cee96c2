import { Op } from 'sequelize';
import { ENGINE_VERSION } from '$lib/kinetics/version';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import type { JobProgress, JobStatus } from '$lib/schemas/job';
import { Fit, FitRun, Job, Run, RunRevision, Scheme, SchemeVersion, User } from '../database/models';
import { notFound } from '../errors';
import { withInput } from '../jobs/inputs';
import { aheadOf } from '../jobs/waiting';
import { isId } from '../ids';
import { can, requireCan, type Action, type Actor } from '../policy';
import { groupsInSight } from '../studies/find';
import { changesSince } from './changes';
import type { FitJobInput } from './start-fit';

export interface FitRunView {
	id: string;
	/** Id of the run within the request and the report. */
	requestId: string;
	number: number;
	name: string;
	revisionId: string;
	revision: number;
	/** A newer revision of the run is there: this fit rests on superseded data. */
	superseded: boolean;
	currentRevision: number;
}

export interface FitView {
	id: string;
	studyId: string;
	groupId: string;
	/** Null until the fit is done. */
	number: number | null;
	status: JobStatus;
	progress: JobProgress | null;
	/** How many will be begun before it, while it waits; null once it runs. */
	ahead: number | null;
	/** Why it failed, in words. */
	error: string | null;
	report: FitReport | null;
	request: FitRequest;
	scheme: {
		id: string;
		name: string;
		number: number;
		versionId: string;
		/** Number of the scheme's newest version. */
		newestNumber: number;
	};
	runs: FitRunView[];
	superseded: boolean;
	inputHash: string;
	/** The fit begun before this one in the study, and what changed since. */
	previous: { id: string; number: number | null; changes: string[] } | null;
	/** Whether the engine is newer than the one that gave the report. */
	engineIsNewer: boolean;
	createdBy: string;
	createdById: string;
	createdAt: Date;
	startedAt: Date | null;
	finishedAt: Date | null;
	canCancel: boolean;
	canWrite: boolean;
}

/** The job of a fit that the actor may see and do this with. */
export async function findFitJob(
	actor: Actor,
	fitId: unknown,
	action: Action,
	options: { withoutInput?: boolean } = {}
): Promise<Job> {
	if (!isId(fitId)) throw notFound('fit');
	const job = await Job.findOne({ where: { id: fitId, kind: 'fit', groupId: groupsInSight(actor) } });
	if (!job) throw notFound('fit');
	requireCan(actor, job.groupId, action, 'fit');
	// The input of a large fit takes longer to read than all the rest.
	return options.withoutInput ? job : withInput(job);
}

async function runsOf(job: Job, input: FitJobInput): Promise<FitRunView[]> {
	const runs = await Run.findAll({
		where: { id: input.runs.map((r) => r.id) },
		attributes: ['id', 'name', 'currentRevisionId']
	});
	const current = await RunRevision.findAll({
		where: { id: runs.map((r) => r.currentRevisionId).filter((id) => id !== null) },
		attributes: ['id', 'runId', 'number']
	});
	return input.runs.map((used) => {
		const now = current.find((r) => r.runId === used.id);
		return {
			...used,
			superseded: now !== undefined && now.id !== used.revisionId,
			currentRevision: now?.number ?? used.revision
		};
	});
}

async function schemeOf(input: FitJobInput): Promise<FitView['scheme']> {
	const [scheme, newest] = await Promise.all([
		Scheme.findByPk(input.scheme.id, { attributes: ['id', 'name'] }),
		SchemeVersion.max<number | null, SchemeVersion>('number', { where: { schemeId: input.scheme.id } })
	]);
	return {
		...input.scheme,
		name: scheme?.name ?? input.scheme.name,
		newestNumber: newest ?? input.scheme.number
	};
}

async function previousOf(job: Job, engineVersion: string | null): Promise<FitView['previous']> {
	const before = await withInput(
		await Job.findOne({
			where: { studyId: job.studyId, kind: 'fit', id: { [Op.lt]: job.id } },
			order: [['id', 'DESC']]
		})
	);
	if (!before) return null;
	const fit = await Fit.findByPk(before.id, { attributes: ['number', 'engineVersion'] });
	const was = before.input as FitJobInput;
	const is = job.input as FitJobInput;
	const changes = changesSince(
		{ ...was, engineVersion: fit?.engineVersion ?? null },
		{ ...is, engineVersion }
	);
	return { id: before.id, number: fit?.number ?? null, changes };
}

/** A fit with its report, or its progress while it runs. */
export async function readFit(actor: Actor, fitId: string): Promise<FitView> {
	const job = await findFitJob(actor, fitId, 'study.read');
	const input = job.input as FitJobInput;
	const [fit, scheme, runs, author, ahead] = await Promise.all([
		Fit.findByPk(job.id),
		schemeOf(input),
		runsOf(job, input),
		User.findByPk(job.createdById, { attributes: ['id', 'name'] }),
		job.status === 'queued' ? aheadOf(job.id) : null
	]);
	const open = job.status === 'queued' || job.status === 'running';
	const engineVersion = fit?.report.engineVersion ?? null;
	return {
		id: job.id,
		studyId: job.studyId!,
		groupId: job.groupId,
		number: fit?.number ?? null,
		status: job.status,
		progress: (job.progress as JobProgress | null) ?? null,
		ahead,
		error: job.error,
		report: fit?.report ?? null,
		request: fit?.request ?? input.request,
		scheme,
		runs,
		superseded: runs.some((r) => r.superseded),
		inputHash: job.inputHash,
		previous: await previousOf(job, engineVersion),
		engineIsNewer: engineVersion !== null && engineVersion !== ENGINE_VERSION,
		createdBy: author?.name ?? 'somebody who has left',
		createdById: job.createdById,
		createdAt: job.createdAt,
		startedAt: job.startedAt,
		finishedAt: fit?.finishedAt ?? job.finishedAt,
		canCancel: open && can(actor, job.groupId, 'fit.run'),
		canWrite: can(actor, job.groupId, 'study.write')
	};
}

/** Fits that used a revision of this run, with the number of the revision. */
export async function fitsOfRun(
	runId: string
): Promise<{ id: string; number: number; revisionId: string }[]> {
	const uses = await FitRun.findAll({ where: { runId } });
	const fits = await Fit.findAll({
		where: { id: uses.map((u) => u.fitId) },
		attributes: ['id', 'number'],
		order: [['number', 'ASC']]
	});
	return fits.map((fit) => ({
		id: fit.id,
		number: fit.number,
		revisionId: uses.find((u) => u.fitId === fit.id)!.runRevisionId
	}));
}
