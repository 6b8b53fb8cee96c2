import { toActor } from '../auth/actor';
import { write, type Tx } from '../database';
import { Job, User } from '../database/models';
import { log } from '../log';
import type { Actor } from '../policy';
import { addEvent, tellListeners, type NumberedEvent } from './events';
import { kindOf } from './kinds';

/** Who asked for the job, as the person is now; the end of the job is recorded under the same name. */
async function starter(job: Job): Promise<Actor> {
	const user = await User.findByPk(job.createdById);
	if (!user) throw new Error(`The person who started job ${job.id} is not there.`);
	return toActor(user, 'job', null);
}

type End = 'done' | 'failed' | 'cancelled';

/** Marks a running job as ended, with what its kind records of it, in one transaction; nothing where it had ended before. */
export async function end(
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

/** Even the end could not be written as it should have been (a full disk, a result that is not one). */
export async function failAfterAll(job: Job, error: unknown): Promise<void> {
	log().error({ err: error, jobId: job.id }, 'the end of a job could not be recorded');
	const message = `The result could not be recorded. Reference for your admin: job ${job.id}`;
	try {
		await end(job, (tx, actor) => kindOf(job.kind).failed(tx, job, actor, message), 'failed', message);
	} catch (again) {
		log().error({ err: again, jobId: job.id }, 'a failed job could not be marked');
	}
}

/** `orderly`: handed back by a service that stops, so that it does not count as an attempt. */
export async function requeue(jobId: string, why: string, orderly: boolean): Promise<void> {
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
