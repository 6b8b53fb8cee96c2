import { beforeAll, describe, expect, it } from 'vitest';
import pinene from '../reference/c01_alpha_pinene_189C.json';
import { POST as postFit } from '../../src/routes/api/v1/kinetics/fit/+server';
import { POST as postSolve } from '../../src/routes/api/v1/kinetics/solve/+server';
import type { FitReport } from '../../src/lib/schemas/fit';
import type { SolveAnswer } from '../../src/lib/schemas/solve';
import type { Problem } from '../../src/lib/server/http';
import type { Actor } from '../../src/lib/server/policy';
import { resetSettings } from '../../src/lib/server/settings';
import { actorOf, makeGroup, makePerson, openTestDatabase } from './support';
import { call } from './support/call';
import { CHAIN, RUN_50C } from './support/work';

openTestDatabase();

let actor: Actor;
beforeAll(async () => {
	actor = await actorOf(await makePerson({ group: await makeGroup(), role: 'chemist' }));
});

const IDS = ['A', 'D', 'O', 'P', 'M'];
const ARROWS = [
	['A', 'D'],
	['A', 'O'],
	['O', 'P'],
	['O', 'M'],
	['M', 'O']
];

/** Table of Fuguitt and Hawkins, J. Am. Chem. Soc. 69 (1947) 319, as in tests/reference/c01. */
const pineneRequest = (unit: string) => ({
	species: IDS.map((id) => ({ id, name: '' })),
	steps: ARROWS.map(([reactant, product], i) => ({
		id: `s${i + 1}`,
		reactant,
		products: [{ species: product, coefficient: 1 }],
		forward: { kRef: { value: 1e-4, unit: '1/min' } },
		reverse: null
	})),
	referenceTemperature: { value: 189.5, unit: 'degC' },
	runs: [
		{
			id: 'r1',
			temperature: { value: 189.5, unit: 'degC' },
			initial: { A: { value: 100, unit } },
			excess: {},
			timeUnit: 'min',
			channels: IDS.map((id) => ({ id, weights: { [id]: 1 }, unit })),
			timepoints: pinene.data.times.map((time, k) => ({
				time,
				values: Object.fromEntries(IDS.map((id, i) => [id, pinene.data.observations[k][i]]))
			}))
		}
	]
});

const fit = async (body: unknown, who = actor) => call(postFit, { actor: who, body });
const solve = async (body: unknown, who = actor) => call(postSolve, { actor: who, body });

describe('POST /api/v1/kinetics/fit', () => {
	it('fits no scheme that a recorded fit would be refused for, and no charge below zero', async () => {
		const sound = { ...CHAIN, runs: [{ ...RUN_50C, id: 'r1' }], options: { starts: 2, profiles: false } };
		const [first, second] = CHAIN.steps;
		const wrong: [unknown, RegExp][] = [
			[{ ...sound, species: [...CHAIN.species, { id: 'A' }] }, /Species A is listed twice/],
			[{ ...sound, steps: [first, { ...second, id: first.id }] }, /Two steps have the id s1/],
			[
				{
					...sound,
					runs: [{ ...RUN_50C, id: 'r1', initial: { A: { value: -0.5, unit: 'mol/L' } } }]
				},
				/charge of A must not be below zero/
			]
		];
		for (const [body, words] of wrong) {
			const { status, body: problem } = await fit(body);
			expect(status).toBe(422);
			expect((problem as Problem).detail).toMatch(words);
		}
		expect((await fit(sound)).status).toBe(200);
	});

	it.each(['%', 'mol/L'])(
		'alpha-pinene in %s: the published constants and sum of squares (Fuguitt & Hawkins 1947; Dolan, Moré & Munson 2004)',
		async (unit) => {
			const { status, body } = await fit(pineneRequest(unit));
			expect(status).toBe(200);
			const report = body as FitReport;
			expect(report.status).toBe('converged');
			report.parameters.forEach((parameter, i) => {
				expect(parameter.unit).toBe('1/min');
				expect(parameter.state).toBe('fitted');
				const expected = pinene.expected.k.value[i];
				expect(Math.abs(parameter.estimate / expected - 1)).toBeLessThan(1e-5);
				const se = pinene.expected.se_k.value[i];
				expect(Math.abs(parameter.standardError! / se - 1)).toBeLessThan(1e-3);
			});
			expect(report.parameters.map((p) => p.id)).toEqual(ARROWS.map((_, i) => `s${i + 1}.forward.kRef`));
			expect(report.weightedSsr).toBeCloseTo(19.8721669342, 6);
			expect(report.pointsUsed).toBe(40);
			expect(report.degreesOfFreedom).toBe(35);
		}
	);

	it('the constants come back in the unit in which they were given', async () => {
		const { body } = await fit({ ...CHAIN, runs: [{ ...RUN_50C, id: 'r1' }] });
		const report = body as FitReport;
		expect(report.parameters.map((p) => p.unit)).toEqual(['1/h', '1/h', '1/h']);
		// Story H1 of the invented compound: 0.794 ± 0.007, 0.297 ± 0.004, 0.0952 ± 0.0030 1/h, computed beforehand.
		expect(report.parameters[0].estimate).toBeCloseTo(0.794, 3);
		expect(report.parameters[1].estimate).toBeCloseTo(0.297, 3);
		expect(report.parameters[2].estimate).toBeCloseTo(0.0952, 4);
		expect(report.pointsUsed).toBe(33);
	});

	it('a field that does not fit is named', async () => {
		const request = pineneRequest('mol/L');
		const wrong = { ...request, referenceTemperature: { value: 'warm', unit: 'degC' } };
		const { status, body, headers } = await fit(wrong);
		expect(status).toBe(422);
		expect(headers.get('content-type')).toContain('application/problem+json');
		expect((body as Problem).code).toBe('invalid');
		expect((body as Problem).fields![0].field).toBe('referenceTemperature.value');
	});

	it('a unit that is none of its kind is refused in words', async () => {
		const request = pineneRequest('mol/L');
		request.steps[0].forward.kRef.unit = 'furlong';
		const { status, body } = await fit(request);
		expect(status).toBe(422);
		expect((body as Problem).detail).toMatch(/furlong/);
		expect((body as Problem).fields![0].field).toBe('s1.forward.kRef');
	});

	it('more than 2000 points are sent to the recorded fits', async () => {
		const request = pineneRequest('mol/L');
		request.runs[0].timepoints = Array.from({ length: 500 }, (_, i) => ({
			time: i + 1,
			values: Object.fromEntries(IDS.map((id) => [id, 1]))
		}));
		const { status, body } = await fit(request);
		expect(status).toBe(413);
		expect((body as Problem).detail).toMatch(/2500/);
	});

	it('needs somebody who is signed in, and a token that is meant for it', async () => {
		expect((await call(postFit, { body: {} })).status).toBe(401);
		const reading = await actorOf(await makePerson(), { scopes: ['read'] });
		expect((await fit(pineneRequest('mol/L'), reading)).status).toBe(403);
	});

	it('counts the calls of a person', async () => {
		process.env.API_LIMIT_PER_MINUTE = '10';
		resetSettings();
		const hasty = await actorOf(await makePerson());
		const small = { ...CHAIN, initial: {}, times: [], timeUnit: 'h' };
		for (let i = 0; i < 10; i++) expect((await solve(small, hasty)).status).toBe(200);
		const refused = await solve(small, hasty);
		expect(refused.status).toBe(429);
		expect(Number(refused.headers.get('retry-after'))).toBeGreaterThan(0);
		delete process.env.API_LIMIT_PER_MINUTE;
		resetSettings();
	});
});

describe('POST /api/v1/kinetics/solve', () => {
	const decay = {
		species: [
			{ id: 'A', name: '' },
			{ id: 'B', name: '' }
		],
		steps: [
			{
				id: 's1',
				reactant: 'A',
				products: [{ species: 'B', coefficient: 1 }],
				forward: { kRef: { value: Math.LN2, unit: '1/h' } },
				reverse: null
			}
		],
		referenceTemperature: { value: 25, unit: 'degC' },
		initial: { A: { value: 800, unit: 'mmol/L' } },
		times: [0, 60, 120],
		timeUnit: 'min'
	};

	it('answers in the unit of the charge, with modes and their half-lives', async () => {
		const { status, body } = await solve(decay);
		expect(status).toBe(200);
		const answer = body as SolveAnswer;
		expect(answer.unit).toBe('mmol/L');
		expect(answer.times).toEqual([0, 60, 120]);
		[800, 400, 200].forEach((value, k) => {
			expect(answer.concentrations.A[k]).toBeCloseTo(value, 9);
			expect(answer.concentrations.B[k]).toBeCloseTo(800 - value, 9);
		});
		const fading = answer.modes.find((mode) => mode.halfLife !== null)!;
		expect(fading.rate.re).toBeCloseTo(-Math.LN2 / 3600, 12);
		expect(fading.rate.unit).toBe('1/s');
		expect(fading.halfLife).toBeCloseTo(3600, 6);
		expect(fading.amplitudes.A).toBeCloseTo(800, 9);
		expect(answer.closedForm.A.text).toContain('[A]');
		expect(answer.errorEstimate).toBeLessThan(1e-9);
	});

	it('A → B ⇌ C with coinciding rates: the values of story H4, by direct calculation', async () => {
		const chain = {
			...CHAIN,
			steps: CHAIN.steps.map((step, i) => ({
				...step,
				forward: { kRef: { value: [0.4, 0.3][i], unit: '1/h' } },
				reverse: i === 1 ? { kRef: { value: 0.1, unit: '1/h' } } : null
			}))
		};
		const { body } = await solve({
			...chain,
			initial: { A: { value: 1, unit: 'mol/L' } },
			times: [2.5, 5],
			timeUnit: 'h'
		});
		const { concentrations } = body as SolveAnswer;
		expect(concentrations.A.map((v) => v.toFixed(5))).toEqual(['0.36788', '0.13534']);
		expect(concentrations.B.map((v) => v.toFixed(5))).toEqual(['0.43394', '0.41917']);
		expect(concentrations.C.map((v) => v.toFixed(5))).toEqual(['0.19818', '0.44550']);
	});

	it('a large batch is solved in a thread, with the same answer', async () => {
		const times = Array.from({ length: 1500 }, (_, i) => i);
		const { status, body } = await solve({ ...decay, times });
		expect(status).toBe(200);
		expect((body as SolveAnswer).concentrations.A[60]).toBeCloseTo(400, 9);
	});

	it('an unknown species in the charge and a step into nowhere are named by their field', async () => {
		const { status, body } = await solve({ ...decay, initial: { Z: { value: 1, unit: 'mol/L' } } });
		expect(status).toBe(422);
		expect((body as Problem).fields).toMatchObject([{ field: 'initial.Z' }]);
	});
});
