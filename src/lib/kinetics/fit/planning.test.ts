import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { fitRequest } from '../../schemas/fit';
import { compareSchemes, ComparisonError } from './compare';
import { fit } from './fit';
import { samplingPlan } from './sampling-plan';

const fixture = (name: string) =>
	readFileSync(new URL(`../../../../tests/fixtures/${name}`, import.meta.url), 'utf8')
		.trim()
		.split(/\r?\n/)
		.slice(1)
		.map((line) => line.split(',').map(Number));
const step = (id: string, from: string, to: string, k: number, back: number | null = null) => ({
	id,
	reactant: from,
	products: [{ species: to }],
	forward: { kRef: { value: k, unit: '1/h' } },
	reverse: back === null ? null : { kRef: { value: back, unit: '1/h' } }
});
const conditions = {
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	timeUnit: 'h' as const
};
const base = {
	species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
	referenceTemperature: { value: 50, unit: 'degC' }
};
const clean = (
	steps: unknown[],
	rows = fixture('s01_clean_50C.csv'),
	options: unknown = { profiles: false }
) =>
	fitRequest.parse({
		...base,
		steps,
		options,
		runs: [
			{
				...conditions,
				id: 'r1',
				channels: ['A', 'B', 'C'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
				timepoints: rows.map(([time, A, B, C]) => ({ time, values: { A, B, C } }))
			}
		]
	});

describe('sampling plans', () => {
	const onlyB = fitRequest.parse({
		...base,
		steps: [step('s1', 'A', 'B', 0.7), step('s2', 'B', 'C', 0.2)],
		runs: [
			{
				...conditions,
				initial: { A: { value: 1, unit: 'mol/L' } },
				channels: [{ id: 'B', weights: { B: 1 }, unit: 'mol/L' }],
				timepoints: []
			}
		]
	});

	it('finds the two times of Box & Lucas (1959) for 0.7 and 0.2 1/h: 1.23 and 6.86 h', () => {
		const plan = samplingPlan(onlyB, null, onlyB.runs[0], { samples: 2, earliest: 0, latest: 20 });
		expect(plan.times[0]).toBeCloseTo(1.23, 2);
		expect(plan.times[1]).toBeCloseTo(6.86, 2);
	});

	it('doubles the same times when four samples are allowed', () => {
		const plan = samplingPlan(onlyB, null, onlyB.runs[0], { samples: 4, earliest: 0, latest: 20 });
		[1.23, 1.23, 6.86, 6.86].forEach((t, i) => expect(plan.times[i]).toBeCloseTo(t, 1));
	});

	it('keeps windows and gaps', () => {
		const plan = samplingPlan(onlyB, null, onlyB.runs[0], {
			samples: 4,
			earliest: 0.5,
			latest: 20,
			minimumGap: 0.5,
			windows: [
				[0, 3],
				[8, 12]
			]
		});
		plan.times.forEach((t, i) => {
			expect(t <= 3 || (t >= 8 && t <= 12)).toBe(true);
			if (i > 0) expect(t - plan.times[i - 1]).toBeGreaterThanOrEqual(0.5 - 1e-9);
		});
	});

	it('puts one sample of a single decay at 1/k', () => {
		const decay = fitRequest.parse({
			...base,
			steps: [step('s1', 'A', 'B', 0.4)],
			runs: [{ ...conditions, channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }], timepoints: [] }]
		});
		const plan = samplingPlan(decay, null, decay.runs[0], { samples: 1, earliest: 0, latest: 20 });
		expect(plan.times[0]).toBeCloseTo(2.5, 2);
	});

	it('adds to the information of a fit, asks for late samples and promises narrower intervals', () => {
		const steps = [step('s1', 'A', 'B', 1), step('s2', 'B', 'C', 1, 1)];
		const early = clean(
			steps,
			fixture('s01_clean_50C.csv').filter(([t]) => t <= 2)
		);
		const report = fit(early);
		const plan = samplingPlan(early, report, early.runs[0], { samples: 2, earliest: 0, latest: 24 });
		expect(plan.times[1]).toBeGreaterThan(4);
		const back = plan.expected.find((e) => e.parameter === 's2.reverse.kRef')!;
		expect(back.after!).toBeLessThan(0.3 * back.before!);
	});

	it('refuses limits that leave no room', () => {
		const ask = (over: object) => () =>
			samplingPlan(onlyB, null, onlyB.runs[0], { samples: 2, earliest: 0, latest: 20, ...over });
		expect(ask({ latest: 0 })).toThrow(/latest/);
		expect(ask({ samples: 40, minimumGap: 1 })).toThrow(/do not fit/);
		expect(ask({ windows: [[30, 40]] })).toThrow(/no time/);
	});
});

describe('rival schemes', () => {
	const reversible = clean([step('s1', 'A', 'B', 1), step('s2', 'B', 'C', 1, 1)]);
	const irreversible = clean([step('s1', 'A', 'B', 1), step('s2', 'B', 'C', 1)]);
	const entry = (name: string, request: typeof reversible) => ({ name, request, report: fit(request) });

	it('rejects the irreversible scheme on the clean sheet by 145 units of AICc and by the nested F test', () => {
		const result = compareSchemes([entry('irreversible', irreversible), entry('reversible', reversible)]);
		expect(result.rows.map((r) => r.name)).toEqual(['reversible', 'irreversible']);
		expect(Math.round(result.rows[1].deltaAicc!)).toBe(145);
		expect(result.rows[0].akaikeWeight).toBeCloseTo(1, 12);
		const test = result.nested[0];
		expect([test.simpler, test.fuller, test.df1, test.df2]).toEqual(['irreversible', 'reversible', 1, 30]);
		const [full, less] = result.rows.map((r) => r.weightedSsr);
		expect(test.f).toBeCloseTo((less - full) / (full / 30), 8);
		expect(test.p).toBeLessThan(1e-10);
		expect(result.findings[0].message).toMatch(/best of those compared/);
	});

	it('names the sample that separates two schemes that fit early data alike', () => {
		const rows = fixture('s01_clean_50C.csv').filter(([t]) => t <= 1);
		const result = compareSchemes([
			entry('irreversible', clean([step('s1', 'A', 'B', 1), step('s2', 'B', 'C', 1)], rows)),
			entry('by way of C only', clean([step('s1', 'A', 'B', 1), step('s2', 'A', 'C', 0.2)], rows))
		]);
		expect(result.next!.time).toBeGreaterThan(1);
		expect(result.next!.separation).toBeGreaterThan(2);
		expect(result.next!.predictions[0]).not.toBeCloseTo(result.next!.predictions[1], 2);
	});

	it('refuses different data or weights', () => {
		const fewer = clean([step('s1', 'A', 'B', 1)], fixture('s01_clean_50C.csv').slice(0, 8));
		expect(() => compareSchemes([entry('a', reversible), entry('b', fewer)])).toThrow(ComparisonError);
		const weighed = clean([step('s1', 'A', 'B', 1), step('s2', 'B', 'C', 1)], undefined, {
			profiles: false,
			weighting: { model: 'combined', a: 0.004, b: 0.01 }
		});
		expect(() => compareSchemes([entry('a', reversible), entry('b', weighed)])).toThrow(/same weights/);
	});
});
