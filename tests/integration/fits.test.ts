import { afterEach, beforeAll, describe, expect, it } from 'vitest';
import { CHAIN, RUN_50C, makeWork, registerQuickFits } from './support/work';
import { AuditEvent, Fit, FitRun, Job, type Group } from '../../src/lib/server/database/models';
import { cancelFit } from '../../src/lib/server/fits/cancel-fit';
import { listFits } from '../../src/lib/server/fits/list-fits';
import { planFit } from '../../src/lib/server/fits/plan-fit';
import { readFit } from '../../src/lib/server/fits/read-fit';
import { startFit } from '../../src/lib/server/fits/start-fit';
import { startQueue, stopQueue } from '../../src/lib/server/jobs/queue';
import { jobEnd } from '../../src/lib/server/jobs/wait';
import type { Actor } from '../../src/lib/server/policy';
import { excludePoint } from '../../src/lib/server/runs/exclude-point';
import { makeActor, makeGroup, openTestDatabase } from './support';

const test = openTestDatabase();

let group: Group;
let chemist: Actor;
let other: Actor;
beforeAll(async () => {
	group = await makeGroup();
	chemist = await makeActor(group);
	other = await makeActor(await makeGroup());
	registerQuickFits();
});
afterEach(stopQueue);

describe('the plan of a fit', () => {
	it('says what is fitted and what is held fixed, before anything is started', async () => {
		const work = await makeWork(chemist, group.id);
		const plan = await planFit(chemist, { ...work, options: { fixed: ['s2.reverse.kRef'] } });
		expect(plan.ready).toBe(true);
		expect(plan.parameters.map((p) => [p.id, p.state])).toEqual([
			['s1.forward.kRef', 'fitted'],
			['s2.forward.kRef', 'fitted'],
			['s2.reverse.kRef', 'fixed']
		]);
		expect(plan.parameters[0].start).toEqual({ value: 0.5, unit: '1/h' });
		expect(plan.runs).toMatchObject([{ number: 1, requestId: 'r1', values: 36 }]);
		expect(await Job.count({ where: { studyId: work.studyId } })).toBe(0);
	});

	it('names the constants by the temperature of the runs where there are no activation energies', async () => {
		const scheme = { ...CHAIN, referenceTemperature: { value: 25, unit: 'degC' } };
		const plan = await planFit(chemist, await makeWork(chemist, group.id, { scheme }));
		expect(plan.request.referenceTemperature).toEqual({ value: 50, unit: 'degC' });
		expect(plan.issues.map((i) => i.code)).toContain('reference-is-run-temperature');
	});

	it('opens missing activation energies when the runs differ in temperature, and says so', async () => {
		const warm = { ...RUN_50C, temperature: { value: 60, unit: 'degC' } };
		const work = await makeWork(chemist, group.id, { runs: [RUN_50C, warm] });
		const plan = await planFit(chemist, work);
		expect(plan.parameters.filter((p) => p.kind === 'energy').map((p) => p.state)).toEqual([
			'fitted',
			'fitted',
			'fitted'
		]);
		expect(plan.issues.map((i) => i.code)).toContain('energies-fitted');
		const asDrawn = await planFit(chemist, { ...work, energies: 'scheme' });
		expect(asDrawn.parameters.some((p) => p.kind === 'energy')).toBe(false);
		expect(asDrawn.issues.map((i) => i.code)).toContain('energy-missing');
	});

	it('leaves out a column that the scheme does not have, in words, and stops when nothing is left', async () => {
		const scheme = { ...CHAIN, species: CHAIN.species.slice(0, 2), steps: [CHAIN.steps[0]] };
		const plan = await planFit(chemist, await makeWork(chemist, group.id, { scheme }));
		expect(plan.issues.map((i) => i.code)).toContain('channel-outside-scheme');
		expect(plan.request.runs[0].channels.map((c) => c.id)).toEqual(['A', 'B']);
		const strange = {
			...CHAIN,
			species: [
				{ id: 'X', name: '' },
				{ id: 'Y', name: '' }
			],
			steps: [{ ...CHAIN.steps[0], reactant: 'X', products: [{ species: 'Y', coefficient: 1 }] }]
		};
		const work = await makeWork(chemist, group.id, { scheme: strange });
		expect((await planFit(chemist, work)).ready).toBe(false);
		await expect(startFit(chemist, work)).rejects.toMatchObject({ code: 'invalid' });
	});
});

describe('a recorded fit', () => {
	it('is written with the runs it used and the audit entry, under the id of its job', async () => {
		await startQueue();
		const work = await makeWork(chemist, group.id);
		const { id, reused } = await startFit(chemist, { ...work, options: { seed: 7 } });
		expect(reused).toBe(false);
		expect(await jobEnd(id)).toBe('done');
		const view = await readFit(chemist, id);
		expect(view).toMatchObject({ id, number: 1, status: 'done', superseded: false, createdBy: chemist.name });
		expect(view.report?.seed).toBe(7);
		expect(await FitRun.count({ where: { fitId: id, runId: work.runIds[0] } })).toBe(1);
		const types = (await AuditEvent.findAll({ where: { objectId: id } })).map((e) => e.type);
		expect(types.sort()).toEqual(['fit.finished', 'fit.started']);
		await expect(
			test.database().sequelize.query('DELETE FROM fits WHERE id = ?', { replacements: [id] })
		).rejects.toMatchObject({ original: { message: expect.stringContaining('append-only') as string } });
	});

	it('equal input gives the record that is there; other options or data make a new one', async () => {
		await startQueue();
		const work = await makeWork(chemist, group.id);
		const first = await startFit(chemist, work);
		expect(await startFit(chemist, work)).toEqual({ id: first.id, reused: true });
		await jobEnd(first.id);
		expect(await startFit(chemist, work)).toEqual({ id: first.id, reused: true });
		const second = await startFit(chemist, { ...work, options: { seed: 2 } });
		expect(second.reused).toBe(false);
		await jobEnd(second.id);
		await excludePoint(chemist, {
			runId: work.runIds[0],
			version: 1,
			index: 3,
			channel: null,
			reasonCode: 'sampling error',
			reason: 'vial was not sealed'
		});
		const third = await startFit(chemist, work);
		expect(third.reused).toBe(false);
		await jobEnd(third.id);
		const fits = await listFits(chemist, work.studyId);
		expect(fits.map((f) => [f.number, f.superseded])).toEqual([
			[3, false],
			[2, true],
			[1, true]
		]);
		expect((await readFit(chemist, first.id)).runs[0]).toMatchObject({
			superseded: true,
			revision: 1,
			currentRevision: 2
		});
	});

	it('that is called off stays on the list, in the name of who called it off', async () => {
		registerQuickFits(30_000);
		await startQueue();
		const work = await makeWork(chemist, group.id);
		const { id } = await startFit(chemist, work);
		const lead = await makeActor(group, 'group_lead');
		await cancelFit(lead, id);
		registerQuickFits();
		expect(await readFit(chemist, id)).toMatchObject({ status: 'cancelled', number: null, report: null });
		expect(await Fit.count({ where: { studyId: work.studyId } })).toBe(0);
		expect((await listFits(chemist, work.studyId)).map((f) => f.status)).toEqual(['cancelled']);
		const entry = await AuditEvent.findOne({ where: { objectId: id, type: 'fit.cancelled' } });
		expect(entry!.printedName).toBe(lead.name);
	});

	it('of another group is not there, and a QA reviewer may read but not start', async () => {
		await startQueue();
		const work = await makeWork(chemist, group.id);
		const { id } = await startFit(chemist, work);
		await jobEnd(id);
		await expect(readFit(other, id)).rejects.toMatchObject({ code: 'not-found' });
		await expect(cancelFit(other, id)).rejects.toMatchObject({ code: 'not-found' });
		await expect(startFit(other, work)).rejects.toMatchObject({ code: 'not-found' });
		const qa = await makeActor(group, 'qa_reviewer');
		expect((await readFit(qa, id)).canWrite).toBe(false);
		await expect(startFit(qa, work)).rejects.toMatchObject({ code: 'not-allowed' });
	});

	it('does not take runs of another study', async () => {
		const one = await makeWork(chemist, group.id);
		const two = await makeWork(chemist, group.id);
		await expect(planFit(chemist, { ...one, runIds: two.runIds })).rejects.toMatchObject({
			code: 'not-found'
		});
	});
});
