import { Op } from 'sequelize';
import { write, type Tx } from '../database';
import { Job, JobInput, newId } from '../database/models';
import { log } from '../log';
import type { Actor } from '../policy';
import { settings } from '../settings';
import { end, failAfterAll, requeue } from './endings';
import { addEvent, tellListeners } from './events';
import { withInput } from './inputs';
import { kindOf } from './kinds';
import { progressWriter } from './progress';
import { startThread, ThreadRefused, type Thread } from './thread';
import { waitingInTurn } from './waiting';

/** A job that brought the service down this often is not tried again. */
const MOST_ATTEMPTS = 3;
const HEARTBEAT_MS = 5000;

interface Running {
	thread: Thread<unknown>;
	/** Set when the service stops: the job goes back into the queue instead of ending. */
	handBack: boolean;
	/** Who called it off, if somebody did. */
	cancelledBy: Actor | null;
	/** The end is written. */
	ended: Promise<void>;
	/** The end is written and the thread is gone. */
	over: Promise<void>;
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
	await JobInput.create({ jobId: row.id, input: job.input }, { transaction: tx });
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

/** Takes the job whose turn it is; the conditional update makes sure that nobody else has taken it. */
async function claimNext(): Promise<Job | null> {
	const [id] = await waitingInTurn();
	if (!id) return null;
	const now = new Date();
	const claimed = await write(async (tx) => {
		const [count] = await Job.update(
			{ status: 'running', startedAt: now, heartbeatAt: now },
			{ where: { id, status: 'queued' }, transaction: tx }
		);
		if (count !== 1) return null;
		await Job.increment('attempts', { where: { id }, transaction: tx });
		const event = await addEvent(tx, id, 'running', { status: 'running' });
		return { event, job: await withInput(await Job.findByPk(id, { transaction: tx }), tx) };
	});
	if (!claimed?.job) return claimNext();
	tellListeners(id, claimed.event);
	return claimed.job;
}

function begin(job: Job): Thread<unknown> {
	const kind = kindOf(job.kind);
	return startThread({
		source: kind.source(),
		task: kind.task(job),
		onProgress: progressWriter(job.id, () => running.get(job.id)?.cancelledBy === null)
	});
}

async function run(job: Job): Promise<void> {
	let thread: Thread<unknown>;
	try {
		thread = begin(job);
	} catch (error) {
		return failAfterAll(job, error);
	}
	const entry: Running = {
		thread,
		handBack: false,
		cancelledBy: null,
		ended: Promise.resolve(),
		over: Promise.resolve()
	};
	running.set(job.id, entry);
	const heartbeat = setInterval(() => void beat(job.id), HEARTBEAT_MS);
	entry.ended = thread.result
		.then(
			(result) => end(job, (tx, actor) => kindOf(job.kind).finish(tx, job, actor, result), 'done'),
			(caught: unknown) => endWithout(job, entry, caught)
		)
		.catch((error: unknown) => failAfterAll(job, error))
		.finally(() => clearInterval(heartbeat));
	// The next one begins when this one's thread has given its memory back.
	entry.over = Promise.all([entry.ended, thread.gone]).then(() => {
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
	await Promise.all([...running.values()].map((entry) => entry.over));
}

/** Takes no more work, while open requests still finish. */
export function closeQueue(): void {
	accepting = false;
}

/**
 * Calls a job off: one that waits ends at once, one that runs is stopped, and its end is on record when this returns, whether
 * its thread has noticed or not. False when it had ended before.
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
