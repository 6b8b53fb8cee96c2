import { afterEach, beforeAll, describe, expect, it } from 'vitest';
import { write } from '../../src/lib/server/database';
import { Job, JobEvent, JobInput, type Group } from '../../src/lib/server/database/models';
import { registerKind } from '../../src/lib/server/jobs/kinds';
import { cancelJob, enqueue, startQueue, stopQueue, wake } from '../../src/lib/server/jobs/queue';
import { closeStreams, eventStream } from '../../src/lib/server/jobs/stream';
import { startThread } from '../../src/lib/server/jobs/thread';
import { aheadOf } from '../../src/lib/server/jobs/waiting';
import type { Actor } from '../../src/lib/server/policy';
import { makeActor, makeGroup, openTestDatabase } from './support';

const test = openTestDatabase();

/** A worker that counts in steps, looks at its stop flag or not, and ends in the way it is told to. */
const WORKER = `
const { parentPort, workerData } = require('node:worker_threads');
const { task, stop } = workerData;
const flag = new Int32Array(stop);
const until = Date.now() + task.ms;
let last = 0;
while (Date.now() < until) {
	if (!task.deaf && Atomics.load(flag, 0) === 1) break;
	if (Date.now() - last > 50) { last = Date.now(); parentPort.postMessage({ type: 'progress', progress: { done: last } }); }
}
if (task.crash) throw new Error('crashed');
if (task.refuse) parentPort.postMessage({ type: 'refused', message: 'Two species are named A.', code: 'input' });
else parentPort.postMessage({ type: 'result', result: { answer: task.answer } });
`;

const recorded: string[] = [];
const note = (line: string): Promise<void> => Promise.resolve(void recorded.push(line));
let group: Group;
let actor: Actor;

beforeAll(async () => {
	group = await makeGroup();
	actor = await makeActor(group);
	registerKind('count', {
		source: () => WORKER,
		task: (job) => job.input,
		finish: async (_tx, job, who, result) => {
			await note(`done ${job.id} ${who.userId === actor.userId}`);
			return { result };
		},
		failed: (_tx, job, _who, message) => note(`failed ${job.id} ${message}`),
		cancelled: (_tx, job, who) => note(`cancelled ${job.id} ${who.name}`)
	});
});
afterEach(stopQueue);

async function add(task: Record<string, unknown>, by = actor): Promise<string> {
	const job = await write((tx) =>
		enqueue(tx, {
			kind: 'count',
			groupId: group.id,
			studyId: null,
			input: task,
			inputHash: JSON.stringify(task),
			createdById: by.userId
		})
	);
	await wake();
	return job.id;
}

async function until(id: string, status: string): Promise<Job> {
	for (let i = 0; i < 400; i++) {
		const job = await Job.findByPk(id);
		if (job?.status === status) return job;
		await new Promise((resolve) => setTimeout(resolve, 25));
	}
	throw new Error(`Job ${id} did not become ${status}: ${(await Job.findByPk(id))?.status}`);
}

const types = async (id: string) =>
	(await JobEvent.findAll({ where: { jobId: id }, order: [['seq', 'ASC']] })).map((e) => e.type);

async function frames(response: Response): Promise<{ id: number; event: string; data: unknown }[]> {
	const text = await response.text();
	return text
		.split('\n\n')
		.filter((block) => block.startsWith('id: '))
		.map((block) => {
			const [id, event, data] = block.split('\n').map((line) => line.slice(line.indexOf(': ') + 2));
			return { id: Number(id), event, data: JSON.parse(data) as unknown };
		});
}

describe('the job queue', () => {
	it('runs a job in a thread, numbers its events and records the end under the name of who asked', async () => {
		await startQueue();
		const id = await add({ ms: 700, answer: 42 });
		const job = await until(id, 'done');
		expect(job.attempts).toBe(1);
		expect(job.finishedAt).not.toBeNull();
		const seen = await types(id);
		expect(seen.slice(0, 2)).toEqual(['queued', 'running']);
		expect(seen).toContain('progress');
		expect(seen.at(-1)).toBe('done');
		expect(recorded).toContain(`done ${id} true`);
	});

	it('keeps what it computes apart from its state, which is written anew at every progress', async () => {
		const id = await add({ ms: 5, answer: 'large' });
		const { sequelize } = test.database();
		const [columns] = await sequelize.query('PRAGMA table_info(jobs)');
		expect((columns as { name: string }[]).map((c) => c.name)).not.toContain('input');
		expect((await JobInput.findByPk(id))?.input).toEqual({ ms: 5, answer: 'large' });
		await startQueue();
		await until(id, 'done');
	});

	it('keeps what waits in order and runs no more at a time than there are threads', async () => {
		const first = await add({ ms: 150 });
		const second = await add({ ms: 10 });
		expect((await Job.findByPk(first))?.status).toBe('queued');
		await startQueue();
		await until(first, 'running');
		expect((await Job.findByPk(second))?.status).toBe('queued');
		await until(second, 'done');
		expect((await Job.findByPk(first))?.status).toBe('done');
	});

	it('tells a refusal in the words of the engine and a crash with a reference only', async () => {
		await startQueue();
		const refused = await add({ ms: 5, refuse: true });
		expect((await until(refused, 'failed')).error).toBe('Two species are named A.');
		const crashed = await add({ ms: 5, crash: true });
		const job = await until(crashed, 'failed');
		expect(job.error).toContain(`Reference for your admin: job ${crashed}`);
		expect(job.error).not.toContain('crashed');
	});

	it('cancels a job that listens and one that is deaf, in the name of who called it off', async () => {
		await startQueue();
		const colleague = await makeActor(group, 'group_lead');
		for (const deaf of [false, true]) {
			const id = await add({ ms: 30_000, deaf });
			await until(id, 'running');
			expect(await cancelJob(id, colleague)).toBe(true);
			expect((await Job.findByPk(id))?.status).toBe('cancelled');
			expect(recorded).toContain(`cancelled ${id} ${colleague.name}`);
			expect(await cancelJob(id, colleague)).toBe(false);
		}
	});

	it('has the end on record before the thread is gone, and begins the next job only after that', async () => {
		await startQueue();
		const busy = await add({ ms: 30_000, deaf: true });
		const next = await add({ ms: 5 });
		await until(busy, 'running');
		await cancelJob(busy, actor);
		// The thread never looked at its flag; nothing of it is waited for.
		expect((await Job.findByPk(busy))?.status).toBe('cancelled');
		expect((await Job.findByPk(next))?.status).toBe('queued');
		await until(next, 'done');
		const seen = await types(busy);
		expect(seen.filter((t) => t !== 'progress')).toEqual(['queued', 'running', 'cancelled']);
		expect(seen.at(-1)).toBe('cancelled');
	});

	it('a thread that is called off is refused first and gone afterwards, without a word of its own', async () => {
		const order: string[] = [];
		const told: unknown[] = [];
		const thread = startThread({
			source: WORKER,
			task: { ms: 30_000, deaf: true },
			onProgress: (p) => told.push(p)
		});
		const refused = thread.result.catch((caught: Error) => order.push(caught.name));
		const gone = thread.gone.then(() => order.push('gone'));
		while (told.length === 0) await new Promise((resolve) => setTimeout(resolve, 5));
		thread.cancel();
		const before = told.length;
		await Promise.all([refused, gone]);
		expect(order).toEqual(['ThreadCancelled', 'gone']);
		expect(told).toHaveLength(before);
	});

	it('people take turns: the first of one comes before the second of another', async () => {
		const [one, colleague] = [await makeActor(group), await makeActor(group)];
		const mine = [await add({ ms: 5 }, one), await add({ ms: 5 }, one), await add({ ms: 5 }, one)];
		const theirs = await add({ ms: 5 }, colleague);
		expect(await aheadOf(theirs)).toBe(1);
		expect(await aheadOf(mine[1])).toBe(2);
		await startQueue();
		await until(mine[2], 'done');
		const begun = await Job.findAll({ where: { id: [...mine, theirs] }, order: [['startedAt', 'ASC']] });
		expect(begun.map((job) => job.id).indexOf(theirs)).toBeLessThanOrEqual(1);
		expect(await aheadOf(theirs)).toBeNull();
	});

	it('cancels a job that still waits without starting it', async () => {
		const id = await add({ ms: 5 });
		expect(await cancelJob(id, actor)).toBe(true);
		expect(await types(id)).toEqual(['queued', 'cancelled']);
	});

	it('hands back what runs when the service stops, and begins it again at the next start', async () => {
		await startQueue();
		const id = await add({ ms: 900, answer: 1 });
		await until(id, 'running');
		await stopQueue();
		expect((await Job.findByPk(id))?.status).toBe('queued');
		await startQueue();
		await until(id, 'done');
		expect((await types(id)).filter((t) => t === 'running')).toHaveLength(2);
	});

	it('after a crash of the service takes up again what was running, but not for ever', async () => {
		const fresh = await add({ ms: 5 });
		const doomed = await add({ ms: 5 });
		await write(async (tx) => {
			await Job.update({ status: 'running', attempts: 1 }, { where: { id: fresh }, transaction: tx });
			await Job.update({ status: 'running', attempts: 3 }, { where: { id: doomed }, transaction: tx });
		});
		await startQueue();
		await until(fresh, 'done');
		expect((await until(doomed, 'failed')).error).toContain('went down 3 times');
	});
});

describe('the event stream of a job', () => {
	it('gives every event once and in order, from before and from now, and ends with the job', async () => {
		await startQueue();
		const id = await add({ ms: 700, answer: 7 });
		const got = await frames(await eventStream(id, false, 0));
		expect(got.map((f) => f.id)).toEqual(got.map((_, i) => i + 1));
		expect(got.at(-1)).toMatchObject({ event: 'done', data: { status: 'done', result: { answer: 7 } } });
	});

	it('goes on after the event that the reader saw last, and says when there is nothing more to come', async () => {
		await startQueue();
		const id = await add({ ms: 5, answer: 7 });
		await until(id, 'done');
		const got = await frames(await eventStream(id, true, 2));
		expect(got[0].id).toBe(3);
		expect((await eventStream(id, true, got.at(-1)!.id)).status).toBe(204);
	});

	it('is closed when the service stops', async () => {
		await startQueue();
		const id = await add({ ms: 2000 });
		const reading = frames(await eventStream(id, false, 0));
		await until(id, 'running');
		closeStreams();
		const got = await reading;
		expect(got.map((f) => f.event)).not.toContain('done');
	});
});
