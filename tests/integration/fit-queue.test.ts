import { afterEach, beforeAll, describe, expect, it } from 'vitest';
import { makeActor, makeGroup, openTestDatabase } from './support';
import { makeWork, registerQuickFits } from './support/work';
import { AuditEvent, Job, type Group } from '../../src/lib/server/database/models';
import { cancelFit } from '../../src/lib/server/fits/cancel-fit';
import { fitPlace } from '../../src/lib/server/fits/fit-place';
import { readFit } from '../../src/lib/server/fits/read-fit';
import { startFit } from '../../src/lib/server/fits/start-fit';
import { cancelJob, startQueue, stopQueue } from '../../src/lib/server/jobs/queue';
import { jobEnd } from '../../src/lib/server/jobs/wait';
import type { Actor } from '../../src/lib/server/policy';
import { resetSettings } from '../../src/lib/server/settings';

openTestDatabase();

let group: Group;
let chemist: Actor;
let colleague: Actor;
beforeAll(async () => {
	group = await makeGroup();
	registerQuickFits();
});
afterEach(async () => {
	await stopQueue();
	for (const job of await Job.findAll({ where: { status: 'queued' } })) await cancelJob(job.id, chemist);
	delete process.env.FITS_PER_PERSON;
	resetSettings();
});

async function twoPeople(): Promise<Awaited<ReturnType<typeof makeWork>>> {
	chemist = await makeActor(group);
	colleague = await makeActor(group);
	return makeWork(chemist, group.id);
}

describe('the queue of fits', () => {
	it('takes no more from one person than the setting allows, and says why and the way out', async () => {
		process.env.FITS_PER_PERSON = '2';
		resetSettings();
		const work = await twoPeople();
		const start = (actor: Actor, seed: number) => startFit(actor, { ...work, options: { seed } });
		const first = await start(chemist, 1);
		await start(chemist, 2);
		const refused = start(chemist, 3);
		await expect(refused).rejects.toMatchObject({ code: 'too-many-requests', status: 429 });
		await expect(refused).rejects.toThrow(
			/2 fits of yours are waiting .*Wait until one has ended, or cancel one/
		);
		expect(await Job.count({ where: { studyId: work.studyId } })).toBe(2);
		// What is there already is given all the same, and a colleague has room of their own.
		expect(await start(chemist, 1)).toEqual({ id: first.id, reused: true });
		expect((await start(colleague, 3)).reused).toBe(false);
		await cancelFit(chemist, first.id);
		expect((await start(chemist, 4)).reused).toBe(false);
	});

	it('says how many come before a fit that waits, to those who may see it', async () => {
		const work = await twoPeople();
		const start = (actor: Actor, seed: number) => startFit(actor, { ...work, options: { seed } });
		await start(chemist, 1);
		const second = await start(chemist, 2);
		const theirs = await start(colleague, 3);
		expect(await fitPlace(chemist, second.id)).toEqual({ status: 'queued', ahead: 2 });
		expect((await readFit(chemist, theirs.id)).ahead).toBe(1);
		const stranger = await makeActor(await makeGroup());
		await expect(fitPlace(stranger, second.id)).rejects.toMatchObject({ code: 'not-found' });
		await startQueue();
		await jobEnd(second.id);
		expect(await fitPlace(chemist, second.id)).toEqual({ status: 'done', ahead: null });
	});

	it('a running fit is cancelled by the time the call returns, and its end stands in the audit trail', async () => {
		registerQuickFits(30_000);
		await startQueue();
		const work = await twoPeople();
		const { id } = await startFit(chemist, work);
		while ((await fitPlace(chemist, id)).status !== 'running')
			await new Promise((resolve) => setTimeout(resolve, 10));
		expect(await cancelFit(colleague, id)).toEqual({ id, status: 'cancelled' });
		expect((await Job.findByPk(id))?.status).toBe('cancelled');
		const last = await AuditEvent.findOne({ where: { objectId: id }, order: [['seq', 'DESC']] });
		expect(last).toMatchObject({ type: 'fit.cancelled', printedName: colleague.name });
		registerQuickFits();
	});
});
