import { Op } from 'sequelize';
import type { FitRequest } from '$lib/schemas/fit';
import { ENGINE_VERSION } from '$lib/kinetics/version';
import { appendAudit } from '../audit/append';
import { write, type Tx } from '../database';
import { Fit, Job } from '../database/models';
import { AppError } from '../errors';
import { enqueue, wake } from '../jobs/queue';
import { openJobs } from '../jobs/waiting';
import type { Actor } from '../policy';
import { settings } from '../settings';
import { findStudy } from '../studies/find';
import { makePlan, type FitPlan, type PlanFitInput } from './plan-fit';

/** What a fit's job keeps: all that its record will need, so that later changes do not touch it. */
export interface FitJobInput {
	request: FitRequest;
	scheme: FitPlan['scheme'];
	runs: {
		id: string;
		requestId: string;
		number: number;
		name: string;
		revisionId: string;
		revision: number;
	}[];
}

export interface StartedFit {
	id: string;
	/** True when an equal fit was there already (done or under way) and is given instead. */
	reused: boolean;
}

function refuse(plan: FitPlan): AppError {
	const stops = plan.issues.filter((issue) => issue.level === 'stop');
	return new AppError('invalid', stops[0].message, {
		fields: stops.map(({ message, parameters, runs }) => ({
			field: parameters?.[0] ?? runs?.[0] ?? 'scheme',
			message
		}))
	});
}

/** The same content computed by the same engine gives the same digits: the record that is there is the answer. */
async function equalFit(tx: Tx, studyId: string, inputHash: string): Promise<string | null> {
	const done = await Fit.findOne({ where: { studyId, inputHash }, attributes: ['id'], transaction: tx });
	if (done) return done.id;
	const under = await Job.findOne({
		where: { studyId, kind: 'fit', inputHash, status: { [Op.in]: ['queued', 'running'] } },
		attributes: ['id'],
		transaction: tx
	});
	return under?.id ?? null;
}

function jobInput(plan: FitPlan): FitJobInput {
	return {
		request: plan.request,
		scheme: plan.scheme,
		runs: plan.runs.map(({ id, requestId, number, name, revisionId, revision }) => ({
			id,
			requestId,
			number,
			name,
			revisionId,
			revision
		}))
	};
}

/** The computer is everybody's: one person cannot fill the queue. */
async function requireRoom(tx: Tx, actor: Actor): Promise<void> {
	const most = settings().FITS_PER_PERSON;
	const open = await openJobs('fit', actor.userId, tx);
	if (open < most) return;
	throw new AppError(
		'too-many-requests',
		`${open === 1 ? 'One fit of yours is' : `${open} fits of yours are`} waiting or running, and ${most} at a time ${most === 1 ? 'is' : 'are'} the most for one person, so that others get their turn. Wait until one has ended, or cancel one that is not needed; then start this one again.`,
		{ data: { open, most, retryAfterS: 10 } }
	);
}

/** Queues the job and writes the audit entry; an equal fit that is there is given instead. */
export async function enqueueFit(
	tx: Tx,
	actor: Actor,
	about: { studyId: string; groupId: string; input: FitJobInput; inputHash: string }
): Promise<StartedFit> {
	const { studyId, groupId, input, inputHash } = about;
	const equal = await equalFit(tx, studyId, inputHash);
	if (equal) return { id: equal, reused: true };
	await requireRoom(tx, actor);
	const job = await enqueue(tx, {
		kind: 'fit',
		groupId,
		studyId,
		input,
		inputHash,
		createdById: actor.userId
	});
	await appendAudit(tx, actor, {
		type: 'fit.started',
		payload: {
			inputHash,
			schemeVersionId: input.scheme.versionId,
			runRevisionIds: input.runs.map((r) => r.revisionId),
			options: input.request.options,
			engineVersion: ENGINE_VERSION,
			seed: input.request.options.seed
		},
		groupId,
		studyId,
		objectType: 'fit',
		objectId: job.id
	});
	return { id: job.id, reused: false };
}

/** Starts a recorded fit as a job; the job's id is the fit's. */
export async function startFit(actor: Actor, input: PlanFitInput): Promise<StartedFit> {
	await findStudy(actor, input.studyId, 'fit.run');
	const started = await write(async (tx) => {
		const study = await findStudy(actor, input.studyId, 'fit.run', tx);
		const plan = await makePlan(actor, study, input, tx);
		if (!plan.ready) throw refuse(plan);
		return enqueueFit(tx, actor, {
			studyId: study.id,
			groupId: study.groupId,
			input: jobInput(plan),
			inputHash: plan.inputHash
		});
	});
	if (!started.reused) void wake();
	return started;
}
