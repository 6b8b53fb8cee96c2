import { Op } from 'sequelize';
import { toActor } from '../auth/actor';
import { write, type Tx } from '../database';
import { Job, newId, User } from '../database/models';
import { log } from '../log';
import type { Actor } from '../policy';
import { settings } from '../settings';
import { addEvent, tellListeners, type NumberedEvent } from './events';
import { kindOf } from './kinds';
import { startThread, ThreadRefused, type Thread } from './thread';

/** A job that brought the service down this often is not tried again. */
const MOST_ATTEMPTS = 3;
const PROGRESS_EVERY_MS = 300;
const HEARTBEAT_MS = 5000;

interface Running {
	thread: Thread<unknown>;
	/** Set when the service stops: the job goes back into the queue instead of ending. */
	handBack: boolean;
	/** Who called it off, if somebody did. */
	cancelledBy: Actor | null;
	ended: Promise<void>;
}

const running = new Map<string, Running>();
let accepting = false;
let starting: Promise<void> = Promise.resolve();

export interface NewJob {
	kind: string;
	groupId: string;
	studyId: string | null;
	input: unknown;
	inputHash: string;
	createdById: string;
}

/** Adds a job in the transaction of what asked for it; call `wake()` after the commit. */
export async function enqueue(tx: Tx, job: NewJob): Promise<Job> {
	const row = await Job.create({ id: newId(), status: 'queued', ...job }, { transaction: tx });
	await addEvent(tx, row.id, 'queued', { status: 'queued' });
	return row;
}

/** Starts what waits, as far as there are threads free. May be called at any time. */
export function wake(): Promise<void> {
	starting = starting.then(startWaiting, startWaiting);
	return starting;
}

async function startWaiting(): Promise<void> {
	try {
		while (accepting && running.size < settings().FIT_WORKERS) {
			const job = await claimNext();
			if (!job) return;
			await run(job);
		}
	} catch (error) {
		log().error({ err: error }, 'the job queue could not start a job');
	}
}

/** Takes the oldest waiting job; the conditional update makes sure that nobody else has taken it. */
async function claimNext(): Promise<Job | null> {
	const next = await Job.findOne({ where: { status: 'queued' }, order: [['id', 'ASC']], attributes: ['id'] });
	if (!next) return null;
	const now = new Date();
	const claimed = await write(async (tx) => {
		const [count] = await Job.update(
			{ status: 'running', startedAt: now, heartbeatAt: now },
			{ where: { id: next.id, status: 'queued' }, transaction: tx }
		);
		if (count !== 1) return null;
		await Job.increment('attempts', { where: { id: next.id }, transaction: tx });
		const event = await addEvent(tx, next.id, 'running', { status: 'running' });
		return { event, job: await Job.findByPk(next.id, { transaction: tx }) };
	});
	if (!claimed?.job) return claimNext();
	tellListeners(next.id, claimed.event);
	return claimed.job;
}

function begin(job: Job): Thread<unknown> {
	const kind = kindOf(job.kind);
	return startThread({ source: kind.source(), task: kind.task(job), onProgress: progressWriter(job.id) });
}

async function run(job: Job): Promise<void> {
	let thread: Thread<unknown>;
	try {
		thread = begin(job);
	} catch (error) {
		return failAfterAll(job, error);
	}
	const entry: Running = { thread, handBack: false, cancelledBy: null, ended: Promise.resolve() };
	running.set(job.id, entry);
	const heartbeat = setInterval(() => void beat(job.id), HEARTBEAT_MS);
	entry.ended = thread.result
		.then(
			(result) => end(job, (tx, actor) => kindOf(job.kind).finish(tx, job, actor, result), 'done'),
			(caught: unknown) => endWithout(job, entry, caught)
		)
		.catch((error: unknown) => failAfterAll(job, error))
		.finally(() => {
			clearInterval(heartbeat);
			running.delete(job.id);
			void wake();
		});
}

async function beat(jobId: string): Promise<void> {
	try {
		await write((tx) =>
			Job.update({ heartbeatAt: new Date() }, { where: { id: jobId, status: 'running' }, transaction: tx })
		);
	} catch (error) {
		log().warn({ err: error, jobId }, 'heartbeat not written');
	}
}

/** Keeps only the newest of what comes in faster than it is worth writing down. */
function progressWriter(jobId: string): (progress: unknown) => void {
	let newest: unknown;
	let waiting = false;
	const save = async (): Promise<void> => {
		waiting = false;
		if (!running.has(jobId)) return;
		const progress = newest;
		try {
			const event = await write(async (tx) => {
				const [count] = await Job.update(
					{ progress: progress as object, heartbeatAt: new Date() },
					{ where: { id: jobId, status: 'running' }, transaction: tx }
				);
				return count === 1 ? addEvent(tx, jobId, 'progress', progress) : null;
			});
			if (event) tellListeners(jobId, event);
		} catch (error) {
			log().warn({ err: error, jobId }, 'progress not written');
		}
	};
	return (progress) => {
		newest = progress;
		if (waiting) return;
		waiting = true;
		setTimeout(() => void save(), PROGRESS_EVERY_MS);
	};
}

/** Who asked for the job, as the person is now; the end of the job is recorded under the same name. */
async function starter(job: Job): Promise<Actor> {
	const user = await User.findByPk(job.createdById);
	if (!user) throw new Error(`The person who started job ${job.id} is not there.`);
	return toActor(user, 'job', null);
}

type End = 'done' | 'failed' | 'cancelled';

async function end(
	job: Job,
	record: (tx: Tx, actor: Actor) => Promise<Record<string, unknown> | void>,
	status: End,
	error: string | null = null,
	by?: Actor
): Promise<void> {
	const actor = by ?? (await starter(job));
	const event = await write(async (tx): Promise<NumberedEvent | null> => {
		const [count] = await Job.update(
			{ status, error, finishedAt: new Date() },
			{ where: { id: job.id, status: 'running' }, transaction: tx }
		);
		if (count !== 1) return null;
		const told = (await record(tx, actor)) ?? {};
		return addEvent(tx, job.id, status, { status, ...(error ? { message: error } : {}), ...told });
	});
	if (event) tellListeners(job.id, event);
}

function endWithout(job: Job, entry: Running, caught: unknown): Promise<void> {
	const kind = kindOf(job.kind);
	const by = entry.cancelledBy;
	if (by) return end(job, (tx, actor) => kind.cancelled(tx, job, actor), 'cancelled', null, by);
	if (entry.handBack) return requeue(job.id, 'The service is restarting.', true);
	const message =
		caught instanceof ThreadRefused
			? caught.message
			: `The computation met a fault that nobody foresaw. Reference for your admin: job ${job.id}`;
	if (!(caught instanceof ThreadRefused)) log().error({ err: caught, jobId: job.id }, 'a job failed');
	return end(job, (tx, actor) => kind.failed(tx, job, actor, message), 'failed', message);
}

/** Even the end could not be written as it should have been (a full disk, a result that is not one). */
async function failAfterAll(job: Job, error: unknown): Promise<void> {
	log().error({ err: error, jobId: job.id }, 'the end of a job could not be recorded');
	const message = `The result could not be recorded. Reference for your admin: job ${job.id}`;
	try {
		await end(job, (tx, actor) => kindOf(job.kind).failed(tx, job, actor, message), 'failed', message);
	} catch (again) {
		log().error({ err: again, jobId: job.id }, 'a failed job could not be marked');
	}
}

/** `orderly`: handed back by a service that stops, so that it does not count as an attempt. */
async function requeue(jobId: string, why: string, orderly: boolean): Promise<void> {
	const event = await write(async (tx) => {
		const [count] = await Job.update(
			{
				status: 'queued',
				startedAt: null,
				heartbeatAt: null,
				progress: null,
				...(orderly ? { attempts: 0 } : {})
			},
			{ where: { id: jobId, status: 'running' }, transaction: tx }
		);
		return count === 1 ? addEvent(tx, jobId, 'queued', { status: 'queued', message: why }) : null;
	});
	if (event) tellListeners(jobId, event);
}

/** At the start: what was running when the service went down is begun again, unless it is what brought it down. */
async function takeUpAgain(): Promise<void> {
	const left = await Job.findAll({ where: { status: 'running' } });
	for (const job of left) {
		if (job.cancelRequestedAt)
			await end(job, (tx, actor) => kindOf(job.kind).cancelled(tx, job, actor), 'cancelled');
		else if (job.attempts < MOST_ATTEMPTS) await requeue(job.id, 'Begun again after a restart.', false);
		else {
			const message = `The service went down ${job.attempts} times while this ran; it is not tried again.`;
			await end(job, (tx, actor) => kindOf(job.kind).failed(tx, job, actor, message), 'failed', message);
		}
	}
}

export async function startQueue(): Promise<void> {
	await takeUpAgain();
	accepting = true;
	await wake();
}

/** Hands back what runs, so that the next start begins it again. */
export async function stopQueue(): Promise<void> {
	accepting = false;
	await starting;
	for (const entry of running.values()) {
		entry.handBack = true;
		entry.thread.cancel();
	}
	await Promise.all([...running.values()].map((entry) => entry.ended));
}

/** Takes no more work, while open requests still finish. */
export function closeQueue(): void {
	accepting = false;
}

/**
 * Calls a job off: one that waits ends at once, one that runs is asked to stop. False when it had ended before.
 */
export async function cancelJob(jobId: string, actor: Actor): Promise<boolean> {
	const outcome = await write(async (tx) => {
		const [count] = await Job.update(
			{ cancelRequestedAt: new Date() },
			{ where: { id: jobId, status: { [Op.in]: ['queued', 'running'] } }, transaction: tx }
		);
		if (count !== 1) return { asked: false, event: null };
		const [waiting] = await Job.update(
			{ status: 'cancelled', finishedAt: new Date() },
			{ where: { id: jobId, status: 'queued' }, transaction: tx }
		);
		if (waiting !== 1) return { asked: true, event: null };
		const job = await Job.findByPk(jobId, { transaction: tx });
		await kindOf(job!.kind).cancelled(tx, job!, actor);
		return { asked: true, event: await addEvent(tx, jobId, 'cancelled', { status: 'cancelled' }) };
	});
	if (outcome.event) tellListeners(jobId, outcome.event);
	const entry = running.get(jobId);
	if (outcome.asked && entry) {
		entry.cancelledBy = actor;
		entry.thread.cancel();
		await entry.ended;
	}
	return outcome.asked;
}
