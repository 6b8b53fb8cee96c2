import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { makeWork, registerQuickFits } from './support/work';
import { AuditEvent, type Group } from '../../src/lib/server/database/models';
import { registerFits } from '../../src/lib/server/fits/fit-job';
import { startFit } from '../../src/lib/server/fits/start-fit';
import { fitWorker } from '../../src/lib/server/fits/worker-source';
import { startQueue, stopQueue } from '../../src/lib/server/jobs/queue';
import { jobEnd } from '../../src/lib/server/jobs/wait';
import type { Actor } from '../../src/lib/server/policy';
import { readStudy } from '../../src/lib/server/studies/read-study';
import { computeWindow } from '../../src/lib/server/windows/compute-window';
import { listWindows } from '../../src/lib/server/windows/list-windows';
import { readWindow } from '../../src/lib/server/windows/read-window';
import { makeActor, makeGroup, openTestDatabase } from './support';

openTestDatabase();

let group: Group;
let chemist: Actor;
let studyId: string;
let fitId: string;
let windowId: string;
beforeAll(async () => {
	group = await makeGroup();
	chemist = await makeActor(group);
	registerFits(fitWorker);
	await startQueue();
	const work = await makeWork(chemist, group.id);
	studyId = work.studyId;
	fitId = (await startFit(chemist, work)).id;
	await jobEnd(fitId);
});
afterAll(stopQueue);

const input = {
	temperature: { value: 50, unit: 'degC' },
	charge: { A: { value: 0.5, unit: 'mol/L' } },
	criteria: [{ species: 'A', relation: 'NMT' as const, limit: 1, unit: '% of charge' as const }]
};

describe('a window', () => {
	it('of story H1 finds the most of B at 2.13 h, is kept and shown on the strip', async () => {
		const made = await computeWindow(chemist, { fitId, input });
		windowId = made.id;
		const view = await readWindow(chemist, made.id);
		const top = view.result.maxima.find((m) => m.species === 'B')!;
		// Invented compound; 0.2857 mol/L at 2.13 h was computed beforehand from the fitted constants.
		expect(top.time.value).toBeCloseTo(2.13, 2);
		expect(top.concentration.value).toBeCloseTo(0.2857, 3);
		expect(view).toMatchObject({ number: 1, fitId, createdBy: chemist.name });
		const [listed] = await listWindows(chemist, studyId);
		expect(listed).toMatchObject({ number: 1, line: view.result.summary });
		expect((await readStudy(chemist, studyId)).stations.window).toBe(view.result.summary);
		expect(await AuditEvent.count({ where: { objectId: made.id, type: 'window.computed' } })).toBe(1);
	});

	it('outside the studied range is refused with the field, unless it is asked for', async () => {
		const far = { ...input, temperature: { value: 80, unit: 'degC' } };
		await expect(computeWindow(chemist, { fitId, input: far })).rejects.toMatchObject({
			code: 'invalid',
			options: { fields: [{ field: 'temperature' }] }
		});
	});

	it('rests on a fit that is done', async () => {
		registerQuickFits(30_000);
		const work = await makeWork(chemist, group.id);
		const running = await startFit(chemist, { ...work, options: { seed: 3 } });
		await expect(computeWindow(chemist, { fitId: running.id, input })).rejects.toMatchObject({
			code: 'wrong-state'
		});
	});

	it('of another group is not there, and a QA reviewer computes none', async () => {
		const other = await makeActor(await makeGroup());
		await expect(readWindow(other, windowId)).rejects.toMatchObject({ code: 'not-found' });
		await expect(computeWindow(other, { fitId, input })).rejects.toMatchObject({ code: 'not-found' });
		const qa = await makeActor(group, 'qa_reviewer');
		await expect(computeWindow(qa, { fitId, input })).rejects.toMatchObject({ code: 'not-allowed' });
		expect((await readWindow(qa, windowId)).number).toBe(1);
	});
});
