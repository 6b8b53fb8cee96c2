import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { fitRequest, type FitRequest } from '../../schemas/fit';
import { predict } from './bands';
import { decisionQuantities, type DecisionQuestion } from './decision';
import { fit } from './fit';
import { maxima } from './maximum';

const rows = readFileSync(new URL('../../../../tests/fixtures/s01_clean_50C.csv', import.meta.url), 'utf8')
	.trim()
	.split(/\r?\n/)
	.slice(1)
	.map((line) => line.split(',').map(Number));
const rate = (value: number) => ({ kRef: { value, unit: '1/h' } });
const step = (id: string, from: string, to: string, reverse: boolean) => ({
	id,
	reactant: from,
	products: [{ species: to }],
	forward: rate(1),
	reverse: reverse ? rate(1) : null
});
const clean = fitRequest.parse({
	species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
	steps: [step('s1', 'A', 'B', false), step('s2', 'B', 'C', true)],
	referenceTemperature: { value: 50, unit: 'degC' },
	runs: [
		{
			id: 'r1',
			temperature: { value: 50, unit: 'degC' },
			initial: { A: { value: 0.5, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: ['A', 'B', 'C'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
			timepoints: rows.map(([time, A, B, C]) => ({ time, values: { A, B, C } }))
		}
	],
	options: { starts: 4, profiles: false }
});
const report = fit(clean);

describe('the maximum of B in the clean sheet at 50 °C (invented scenario HX-14)', () => {
	const [time, value] = decisionQuantities(report, clean, 0, [{ kind: 'maximum', species: 'B' }]);

	it('is 0.2857 mol/L at 2.13 h', () => {
		expect(time.value).toBeCloseTo(2.13, 2);
		expect(value.value).toBeCloseTo(0.2857, 4);
		expect([time.unit, value.unit]).toEqual(['h', 'mol/L']);
	});

	it('has the errors that central differences over the estimates give', () => {
		const [other] = maxima(report, clean, 0);
		expect(time.standardError! / other.timeError!).toBeCloseTo(1, 2);
		expect(value.standardError! / other.valueError!).toBeCloseTo(1, 3);
		expect(time.value / other.time).toBeCloseTo(1, 4);
	});

	it('has a profile interval close to the other, for these are nearly linear data', () => {
		time.profileInterval!.forEach((end, i) => {
			const gap = Math.abs(end! - time.interval![i]);
			expect(gap).toBeLessThan(0.15 * time.standardError!);
		});
	});
});

/** A single decay: everything has a closed form. */
const decay = (fitted: boolean): FitRequest =>
	fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B' }],
		steps: [step('s1', 'A', 'B', false)],
		referenceTemperature: { value: 40, unit: 'degC' },
		runs: [
			{
				temperature: { value: 40, unit: 'degC' },
				initial: { A: fitted ? { fit: true } : { value: 0.8, unit: 'mol/L' } },
				timeUnit: 'min',
				channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
				timepoints: [
					[5, 0.642],
					[15, 0.401],
					[30, 0.213],
					[60, 0.051],
					[90, 0.019]
				].map(([time, A]) => ({ time, values: { A } }))
			}
		],
		options: { starts: 4 }
	});

describe('the time to a conversion of a single decay', () => {
	const request = decay(false);
	const fitted = fit(request);
	const k = fitted.parameters[0];
	const perMin = (value: number) => value / 60;
	const questions = [{ kind: 'conversion' as const, species: 'A', conversion: 0.99 }];
	const [time] = decisionQuantities(fitted, request, 0, questions);

	it('is ln 100/k with the relative error of k', () => {
		expect(time.value).toBeCloseTo(Math.log(100) / perMin(k.estimate), 5);
		expect(time.standardError! / time.value).toBeCloseTo(k.standardError! / k.estimate, 6);
		expect(time.beyondSamples).toBe(true);
	});

	it('has as profile limits the times that belong to the profile limits of k', () => {
		const [low, high] = k.profileCi95!;
		expect(time.profileInterval![0]! / (Math.log(100) / perMin(high!))).toBeCloseTo(1, 4);
		expect(time.profileInterval![1]! / (Math.log(100) / perMin(low!))).toBeCloseTo(1, 4);
	});

	it('counts the uncertainty of a fitted charge for a level, but not for a share of that charge', () => {
		const open = decay(true);
		const second = fit(open);
		const rateOf = second.parameters.find((p) => p.id === 's1.forward.kRef')!;
		const [share, level] = decisionQuantities(second, open, 0, [
			...questions,
			{ kind: 'level', species: 'A', level: 0.1 }
		]);
		expect(share.standardError! / share.value).toBeCloseTo(rateOf.standardError! / rateOf.estimate, 6);
		// t = ln(A₀/L)/k: ∂t/∂ln k = −t, ∂t/∂A₀ = 1/(k A₀).
		const amount = second.parameters.find((p) => p.id === 'r1.initial.A')!;
		const byRate = -level.value;
		const byAmount = 1 / (perMin(rateOf.estimate) * amount.estimate);
		const i = second.fittedIds.indexOf('s1.forward.kRef');
		const c = second.covariance;
		const variance =
			byRate ** 2 * c[i][i] + 2 * byRate * byAmount * c[i][1 - i] + byAmount ** 2 * c[1 - i][1 - i];
		expect(level.standardError! / Math.sqrt(variance)).toBeCloseTo(1, 5);
	});

	it('says nothing of a level that is never reached, and refuses what it does not know', () => {
		expect(decisionQuantities(fitted, request, 0, [{ kind: 'level', species: 'B', level: 0.9 }])).toEqual([]);
		expect(() => decisionQuantities(fitted, request, 0, [{ kind: 'maximum', species: 'X' }])).toThrow(
			'no species X'
		);
		expect(() =>
			decisionQuantities(fitted, request, 0, [{ kind: 'conversion', species: 'A', conversion: 99 }])
		).toThrow('between 0 and 1');
	});
});

describe('acceptance criteria in the clean sheet at 50 °C', () => {
	const criterion = (
		species: string,
		relation: 'NMT' | 'NLT',
		limit: number,
		unit: 'mol/L' | '% of charge'
	) => ({
		kind: 'criterion' as const,
		criterion: { species, relation, limit, unit }
	});
	const ask = (...questions: DecisionQuestion[]) =>
		decisionQuantities(report, clean, 0, questions, { profiles: false });

	it('A NMT 5 % of charge is met when 95 % are converted, and from then on', () => {
		const [met, ...more] = ask(criterion('A', 'NMT', 5, '% of charge'));
		const [same] = ask({ kind: 'conversion', species: 'A', conversion: 0.95 });
		expect(met).toMatchObject({ quantity: 'time criterion is met', criterion: 'A NMT 5 % of charge' });
		expect(met.value / same.value).toBeCloseTo(1, 6);
		expect(met.standardError! / same.standardError!).toBeCloseTo(1, 4);
		expect(more).toEqual([]);
	});

	it('B NLT 0.25 mol/L is met and lost again, at the two times where B is at that level', () => {
		const [met, until] = ask(criterion('B', 'NLT', 0.25, 'mol/L'));
		const [level] = ask({ kind: 'level', species: 'B', level: 0.25 });
		expect(met.value / level.value).toBeCloseTo(1, 6);
		expect(until.quantity).toBe('time criterion holds until');
		expect(until.value).toBeGreaterThan(met.value);
		const [then] = ask({ kind: 'composition', time: until.value }).filter((q) => q.species === 'B');
		expect(then.value).toBeCloseTo(0.25, 6);
	});

	it('C NMT 3 % of charge holds from the start, until a time with a profile interval about it', () => {
		const [until] = decisionQuantities(report, clean, 0, [criterion('C', 'NMT', 3, '% of charge')]);
		expect(until.quantity).toBe('time criterion holds until');
		expect(until.profileInterval![0]).toBeLessThan(until.value);
		expect(until.profileInterval![1]).toBeGreaterThan(until.value);
		until.profileInterval!.forEach((end, i) =>
			expect(Math.abs(end! - until.interval![i])).toBeLessThan(0.15 * until.standardError!)
		);
	});

	it('one that is not met within reach gives no time, one without meaning a refusal in words', () => {
		expect(ask(criterion('A', 'NLT', 2, 'mol/L'))).toEqual([]);
		expect(() =>
			ask({
				kind: 'criterion',
				criterion: { species: 'C', relation: 'NLT', limit: 50, unit: '%', quantity: 'conversion' }
			})
		).toThrow(/C is not in the charge/);
	});

	it('the composition at 24 h is that of the curves, with the errors of their confidence band', () => {
		const amounts = ask({ kind: 'composition', time: 24 });
		const band = predict(report, clean, clean.runs[0], [24]).series.filter((s) => s.kind === 'species');
		expect(amounts.map((q) => q.species)).toEqual(['A', 'B', 'C']);
		amounts.forEach((amount, i) => {
			expect(amount.value).toBeCloseTo(band[i].curve[0], 10);
			if (amount.value > 1e-6) {
				expect(amount.interval![0]).toBeCloseTo(band[i].confidence![0][0], 8);
				expect(amount.interval![1]).toBeCloseTo(band[i].confidence![1][0], 8);
			}
		});
		expect(amounts.reduce((sum, q) => sum + q.value, 0)).toBeCloseTo(0.5, 8);
	});
});

describe('a limit in per cent of a charge that is fitted', () => {
	it('moves with the charge: B NMT 10 % of charge counts as A at 90 %, without the error of the charge', () => {
		const open = decay(true);
		const fitted = fit(open);
		const [until] = decisionQuantities(
			fitted,
			open,
			0,
			[{ kind: 'criterion', criterion: { species: 'B', relation: 'NMT', limit: 10, unit: '% of charge' } }],
			{ profiles: false }
		);
		const [converted] = decisionQuantities(
			fitted,
			open,
			0,
			[{ kind: 'conversion', species: 'A', conversion: 0.1 }],
			{ profiles: false }
		);
		expect(until.value / converted.value).toBeCloseTo(1, 5);
		expect(until.standardError! / converted.standardError!).toBeCloseTo(1, 4);
	});
});
