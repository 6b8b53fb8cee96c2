import { afterEach, beforeAll, describe, expect, it } from 'vitest';
import { CHAIN, RUN_50C, makeWork } from './support/work';
import { makeActor, makeGroup, openTestDatabase } from './support';
import { fitQuestion, type FitAnswers } from '../../src/lib/schemas/fit-analysis';
import { samplePlanRequest } from '../../src/lib/schemas/fit-plan';
import { Fit, type Group } from '../../src/lib/server/database/models';
import { askFit } from '../../src/lib/server/fits/analyse-fit';
import { registerFits } from '../../src/lib/server/fits/fit-job';
import { startFit } from '../../src/lib/server/fits/start-fit';
import { fitWorker } from '../../src/lib/server/fits/worker-source';
import { startQueue, stopQueue } from '../../src/lib/server/jobs/queue';
import { jobEnd } from '../../src/lib/server/jobs/wait';
import { planSamplesDirectly } from '../../src/lib/server/kinetics/plan-samples-directly';
import type { Actor } from '../../src/lib/server/policy';

openTestDatabase();

let group: Group;
let chemist: Actor;
beforeAll(async () => {
	group = await makeGroup();
	chemist = await makeActor(group);
	registerFits(fitWorker);
});
afterEach(stopQueue);

const CRITERIA = [
	{ species: 'A', relation: 'NMT' as const, limit: 5, unit: '% of charge' as const },
	{ species: 'C', relation: 'NMT' as const, limit: 20, unit: '% of charge' as const },
	{ species: 'A', relation: 'NLT' as const, limit: 2, unit: 'mol/L' as const }
];

async function fitted(criteria = CRITERIA): Promise<string> {
	await startQueue();
	const work = await makeWork(chemist, group.id, { criteria });
	const { id } = await startFit(chemist, { ...work, options: { starts: 4 } });
	expect(await jobEnd(id)).toBe('done');
	return id;
}

const decisions = async (fitId: string, more: object = {}) =>
	(await askFit(chemist, {
		fitId,
		question: fitQuestion.parse({ kind: 'decisions', run: 'r1', ...more })
	})) as FitAnswers['decisions'];

describe('quantities to decide by', () => {
	it('are those of the study by default: each criterion, the maximum, the end; with intervals and how they were got', async () => {
		const fitId = await fitted();
		const before = (await Fit.findByPk(fitId))!.get({ plain: true });
		const { answers, profiled, timeUnit } = await decisions(fitId);
		expect([profiled, timeUnit]).toEqual([true, 'h']);
		const all = answers.flatMap((a) => a.quantities);
		expect(all.map((q) => [q.quantity, q.species])).toEqual([
			['time criterion is met', 'A'],
			['time criterion holds until', 'C'],
			['time of maximum', 'B'],
			['value at maximum', 'B'],
			['amount at time', 'A'],
			['amount at time', 'B'],
			['amount at time', 'C']
		]);
		// A → B with k1 0.794 1/h (story H1 of the design notes): 5 % are left after ln 20/k1.
		expect(all[0].value).toBeCloseTo(Math.log(20) / 0.794, 1);
		// Maximum of B of the same story: 0.2857 mol/L at 2.13 h.
		expect(all[2].value).toBeCloseTo(2.13, 2);
		expect(all[3].value).toBeCloseTo(0.2857, 4);
		for (const q of all.slice(0, 3)) {
			expect(q.profileInterval![0]).toBeLessThan(q.value);
			expect(q.profileInterval![1]).toBeGreaterThan(q.value);
		}
		expect(answers.find((a) => a.none !== null)?.none).toMatch(/not met within 120 h; there the value is/);
		expect((await Fit.findByPk(fitId))!.get({ plain: true })).toEqual(before);
	});

	it('are also those that a person names; one without a meaning does not take the others with it', async () => {
		const fitId = await fitted([]);
		const { answers } = await decisions(fitId, {
			questions: [
				{ kind: 'conversion', species: 'A', conversion: 0.9 },
				{
					kind: 'criterion',
					criterion: { species: 'C', relation: 'NLT', limit: 50, unit: '%', quantity: 'conversion' }
				},
				{ kind: 'maximum', species: 'A' }
			],
			profiles: false
		});
		expect(answers[0].quantities[0].value).toBeCloseTo(Math.log(10) / 0.794, 1);
		expect(answers[0].quantities[0].profileInterval).toBeNull();
		expect(answers[1].none).toMatch(/C is not in the charge/);
		expect(answers[2].none).toMatch(/no maximum within the studied time/);
		await expect(decisions(fitId, { run: 'r9' })).rejects.toMatchObject({ code: 'invalid' });
	});
});

describe('curves of a run', () => {
	it('come with their bands and without those of species that were not assayed', async () => {
		const fitId = await fitted([]);
		const curves = (await askFit(chemist, {
			fitId,
			question: { kind: 'curves', run: 'r1', points: 25 }
		})) as FitAnswers['curves'];
		expect(curves.times).toHaveLength(25);
		expect(curves.times.at(-1)).toBe(24);
		expect(curves.series.filter((s) => s.kind === 'channel').map((s) => s.id)).toEqual(['A', 'B', 'C']);
		expect(curves.series[0].confidence![0][5]).toBeLessThan(curves.series[0].curve[5]);
	});
});

describe('samples planned before anything was measured', () => {
	const { timepoints: _none, ...run } = RUN_50C;
	const one = { ...CHAIN.steps[1], reverse: null, forward: { kRef: { value: 0.2, unit: '1/h' } } };
	const guessed = {
		...CHAIN,
		steps: [{ ...CHAIN.steps[0], forward: { kRef: { value: 0.7, unit: '1/h' } } }, one]
	};
	const ask = (more: object = {}) =>
		samplePlanRequest.parse({
			species: guessed.species,
			steps: guessed.steps,
			referenceTemperature: guessed.referenceTemperature,
			run,
			error: { a: 0.005 },
			samples: 2,
			earliest: 0,
			latest: 24,
			channels: ['B'],
			...more
		});

	it('are those of Box & Lucas (1959) for 0.7 and 0.2 1/h when B alone is assayed: 1.23 and 6.86 h', async () => {
		const plan = await planSamplesDirectly(chemist, ask());
		expect(plan.times[0]).toBeCloseTo(1.23, 2);
		expect(plan.times[1]).toBeCloseTo(6.86, 2);
		expect(plan.expected.every((w) => w.before === null)).toBe(true);
	});

	it('are refused in words where a limit leaves no room, and to a token without the scope', async () => {
		await expect(planSamplesDirectly(chemist, ask({ earliest: 5, latest: 1 }))).rejects.toMatchObject({
			code: 'invalid',
			message: expect.stringContaining('latest time must lie after the earliest') as string
		});
		const token = { ...chemist, scopes: ['export' as const] };
		await expect(planSamplesDirectly(token, ask())).rejects.toMatchObject({ code: 'not-allowed' });
	});
});
