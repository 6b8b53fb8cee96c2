import { afterEach, beforeAll, describe, expect, it } from 'vitest';
import { CHAIN, RUN_50C, makeWork } from './support/work';
import { makeActor, makeGroup, openTestDatabase } from './support';
import type { FitReport } from '../../src/lib/schemas/fit';
import type { FitAnswers } from '../../src/lib/schemas/fit-analysis';
import { AuditEvent, Fit, type Group } from '../../src/lib/server/database/models';
import { askFit } from '../../src/lib/server/fits/analyse-fit';
import { compareFits } from '../../src/lib/server/fits/compare-fits';
import { confirmFit, listConfirmations, readConfirmation } from '../../src/lib/server/fits/confirm-fit';
import { registerFits } from '../../src/lib/server/fits/fit-job';
import { listFits } from '../../src/lib/server/fits/list-fits';
import { planFit } from '../../src/lib/server/fits/plan-fit';
import { readFit } from '../../src/lib/server/fits/read-fit';
import { refit } from '../../src/lib/server/fits/refit';
import { startFit, type StartedFit } from '../../src/lib/server/fits/start-fit';
import { fitWorker } from '../../src/lib/server/fits/worker-source';
import { startQueue, stopQueue } from '../../src/lib/server/jobs/queue';
import { jobEnd } from '../../src/lib/server/jobs/wait';
import type { Actor } from '../../src/lib/server/policy';
import { createScheme } from '../../src/lib/server/studies/create-scheme';

openTestDatabase();

let group: Group;
let chemist: Actor;
let other: Actor;
beforeAll(async () => {
	group = await makeGroup();
	chemist = await makeActor(group);
	other = await makeActor(await makeGroup());
	registerFits(fitWorker);
});
afterEach(stopQueue);

const done = async ({ id }: StartedFit): Promise<string> => {
	expect(await jobEnd(id)).toBe('done');
	return id;
};

/** The 50 °C run, and the same values with A 1 % higher as a run that no fit used. */
async function fittedWork() {
	await startQueue();
	const unused = {
		...RUN_50C,
		timepoints: RUN_50C.timepoints.map((p) => ({
			...p,
			values: { ...p.values, A: Number(p.values.A) * 1.01 }
		}))
	};
	const work = await makeWork(chemist, group.id, { runs: [RUN_50C, unused] });
	const [used, spare] = work.runIds;
	const options = { starts: 4 };
	const start = { studyId: work.studyId, schemeId: work.schemeId, runIds: [used], options };
	return { ...work, start, used, spare, fitId: await done(await startFit(chemist, start)) };
}

describe('questions on a recorded fit', () => {
	it('are answered from the record, alike each time, and leave it as it is', async () => {
		const { fitId } = await fittedWork();
		const before = (await Fit.findByPk(fitId))!.get({ plain: true });
		const question = { kind: 'profiles' as const };
		const first = (await askFit(chemist, { fitId, question })) as FitAnswers['profiles'];
		expect(first.map((c) => c.id)).toEqual(before.report.fittedIds);
		expect(await askFit(chemist, { fitId, question })).toEqual(first);
		const plan = (await askFit(chemist, {
			fitId,
			question: {
				kind: 'sampling',
				run: 'r1',
				samples: 2,
				earliest: 0.5,
				latest: 30,
				minimumGap: 1,
				windows: [],
				channels: []
			}
		})) as FitAnswers['sampling'];
		expect(plan.times).toHaveLength(2);
		expect(plan.times[1] - plan.times[0]).toBeGreaterThanOrEqual(1);
		for (const width of plan.expected) expect(width.after!).toBeLessThan(width.before!);
		expect((await Fit.findByPk(fitId))!.get({ plain: true })).toEqual(before);
	});

	it('are refused to another group, and in words where they make no sense', async () => {
		const { fitId } = await fittedWork();
		const question = { kind: 'influence' as const };
		await expect(askFit(other, { fitId, question })).rejects.toMatchObject({ code: 'not-found' });
		const impossible = {
			kind: 'sampling' as const,
			run: 'r1',
			samples: 2,
			earliest: 5,
			latest: 1,
			minimumGap: 0,
			windows: [],
			channels: []
		};
		await expect(askFit(chemist, { fitId, question: impossible })).rejects.toMatchObject({
			code: 'invalid',
			message: expect.stringContaining('latest time must lie after the earliest') as string
		});
	});
});

describe('a confirmation run', () => {
	it('is counted and stays on record with the revision it was', async () => {
		const { fitId, spare, used } = await fittedWork();
		await expect(confirmFit(chemist, { fitId, runId: used })).rejects.toMatchObject({ code: 'wrong-state' });
		await confirmFit(chemist, { fitId, runId: spare });
		const [record] = await listConfirmations(chemist, fitId);
		expect(record).toMatchObject({ runId: spare, revision: 1, counted: 33, by: chemist.name });
		expect(record.inside).toBeGreaterThan(28);
		expect(await AuditEvent.count({ where: { objectId: fitId, type: 'fit.confirmation' } })).toBe(1);
		const shown = await readConfirmation(chemist, { fitId, revisionId: record.revisionId });
		expect(shown.confirmation.inside).toBe(record.inside);
		expect(shown.confirmation.points).toHaveLength(33);
		await expect(confirmFit(other, { fitId, runId: spare })).rejects.toMatchObject({ code: 'not-found' });
		const qa = await makeActor(group, 'qa_reviewer');
		expect(await listConfirmations(qa, fitId)).toHaveLength(1);
		await expect(confirmFit(qa, { fitId, runId: spare })).rejects.toMatchObject({ code: 'not-allowed' });
	});
});

describe('rival schemes', () => {
	it('are weighed on the same values: one way instead of reversible is 145 worse in AICc', async () => {
		const { start, studyId, fitId } = await fittedWork();
		const oneWay = { ...CHAIN, steps: CHAIN.steps.map((s) => ({ ...s, reverse: null })) };
		const rival = await createScheme(chemist, { studyId, name: 'One way', content: oneWay });
		const second = await done(await startFit(chemist, { ...start, schemeId: rival.id }));
		const { comparison, obstacle } = await compareFits(chemist, { studyId, fitIds: [second, fitId] });
		expect(obstacle).toBeNull();
		expect(comparison!.rows.map((r) => r.name)).toEqual(['Fit 1', 'Fit 2']);
		// Story H1 of the design notes: AICc 145 worse.
		expect(comparison!.rows[1].deltaAicc).toBeCloseTo(145, -1);
		expect(comparison!.nested[0]).toMatchObject({ simpler: 'Fit 2', fuller: 'Fit 1', df1: 1 });
		expect(comparison!.next).not.toBeNull();
		const [latest] = await listFits(chemist, studyId);
		expect(latest.changes).toEqual(['scheme One way in place of Reversible']);
	});

	it('on different weights or runs are shown without a verdict', async () => {
		const { start, studyId, fitId, spare } = await fittedWork();
		const weighted = await done(
			await startFit(chemist, { ...start, options: { starts: 4, weighting: { model: 'proportional' } } })
		);
		const answer = await compareFits(chemist, { studyId, fitIds: [fitId, weighted] });
		expect(answer).toMatchObject({
			comparison: null,
			obstacle: 'These fits weigh the data by different error models.'
		});
		const elsewhere = await done(await startFit(chemist, { ...start, runIds: [spare] }));
		expect((await compareFits(chemist, { studyId, fitIds: [fitId, elsewhere] })).obstacle).toMatch(
			/same runs/
		);
		await expect(compareFits(other, { studyId, fitIds: [fitId, elsewhere] })).rejects.toMatchObject({
			code: 'not-found'
		});
	});
});

describe('settings of single parameters', () => {
	it('fix, tie, bound and open what the person names', async () => {
		const { start } = await fittedWork();
		const settings = {
			's2.reverse.kRef': { state: 'tied' as const, to: 's2.forward.kRef', factor: 0.32 },
			'r1.initial.A': { state: 'fitted' as const },
			's1.forward.kRef': { state: 'fixed' as const, value: { value: 0.8, unit: '1/h' } }
		};
		const options = {
			tied: [{ parameter: 's2.reverse.kRef', to: 's2.forward.kRef', factor: 0.32 }],
			fixed: ['s1.forward.kRef']
		};
		const plan = await planFit(chemist, { ...start, settings, options });
		expect(plan.parameters.map((p) => [p.id, p.state, p.start?.value])).toEqual([
			['s1.forward.kRef', 'fixed', 0.8],
			['s2.forward.kRef', 'fitted', 0.5],
			['s2.reverse.kRef', 'tied', 0.2],
			['r1.initial.A', 'fitted', 0.5]
		]);
		expect(plan.available.map((p) => p.id)).toEqual([
			'r1.initial.B',
			'r1.initial.C',
			'r1.timeOffset',
			'A.responseFactor',
			'B.responseFactor',
			'C.responseFactor'
		]);
	});
});

describe('refit and compare', () => {
	it('gives the same record while the engine is the same, and never touches it', async () => {
		const { fitId } = await fittedWork();
		expect(await refit(chemist, fitId)).toEqual({ id: fitId, reused: true });
		const view = await readFit(chemist, fitId);
		expect(view.engineIsNewer).toBe(false);
		expect(view.report satisfies FitReport | null).not.toBeNull();
		await expect(refit(other, fitId)).rejects.toMatchObject({ code: 'not-found' });
	});
});
