import { describe, expect, it } from 'vitest';
import { fitRequest } from '../../schemas/fit';
import { decisionQuantities, type DecisionQuestion } from './decision';
import { fit } from './fit';

const k = 0.02;
const factor = 2.5;
/** Area % of B in A → B with response factor 2.5 for B. */
const areaOfB = (time: number) => {
	const a = Math.exp(-k * time);
	return (100 * factor * (1 - a)) / (a + factor * (1 - a));
};
const limit = (value: number, unit: 'area %' | '% of charge' = 'area %'): DecisionQuestion => ({
	kind: 'criterion',
	criterion: { species: 'B', relation: 'NMT', limit: value, unit }
});
const response = { value: factor, unit: '1' };

function decay(responseFactor: object | undefined, unit = 'area %', options: object = {}) {
	const values = (time: number) =>
		unit === 'area %'
			? { A: 100 - areaOfB(time), B: areaOfB(time) }
			: { A: 0.8 * Math.exp(-k * time), B: 0.8 - 0.8 * Math.exp(-k * time) };
	return fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B' }],
		steps: [
			{
				id: 's1',
				reactant: 'A',
				products: [{ species: 'B' }],
				forward: { kRef: { value: 0.03, unit: '1/min' } }
			}
		],
		referenceTemperature: { value: 40, unit: 'degC' },
		runs: [
			{
				temperature: { value: 40, unit: 'degC' },
				initial: { A: { value: 0.8, unit: 'mol/L' } },
				timeUnit: 'min',
				channels: [
					{ id: 'A', weights: { A: 1 }, unit },
					{ id: 'B', weights: { B: 1 }, unit, ...(responseFactor ? { responseFactor } : {}) }
				],
				timepoints: [5, 10, 20, 40, 80, 120].map((time, i) => {
					const { A, B } = values(time);
					const off = (i % 2 ? 1 : -1) * (unit === 'area %' ? 0.2 : 0.002);
					return { time, values: { A: A + off, B: B - off } };
				})
			}
		],
		options: { starts: 3, profiles: false, ...options }
	});
}
const ask = (request: ReturnType<typeof decay>, ...questions: DecisionQuestion[]) =>
	decisionQuantities(fit(request), request, 0, questions, { profiles: false });

describe('a limit in area %', () => {
	it('counts by the response factors that the columns of the run state: met where the fitted area is', () => {
		const request = decay(response);
		const [until] = ask(request, limit(50));
		// f(1 − a)/(a + f(1 − a)) = ½ at a = f/(1 + f).
		expect(until.value / (Math.log((1 + factor) / factor) / k)).toBeCloseTo(1, 1);
		const rate = fit(request).parameters.find((p) => p.id === 's1.forward.kRef')!.estimate;
		expect(until.value).toBeCloseTo(Math.log((1 + factor) / factor) / rate, 4);
		expect(until.note).toBe("response factors of the run's columns: B 2.5, every other species 1");
	});

	it('takes a factor that is held fixed by the options', () => {
		const held = decay({ fit: true, guess: response }, 'area %', { fixed: ['B.responseFactor'] });
		const [until] = ask(held, limit(50));
		const [same] = ask(decay(response), limit(50));
		expect(until.value).toBeCloseTo(same.value, 8);
	});

	it('is refused where such a factor is fitted, for one run or for all; other limits are not', () => {
		const open = decay({ fit: true, guess: response });
		expect(() => ask(open, limit(50))).toThrow(/that of B is fitted or tied/);
		const local = decay({ fit: true, guess: response }, 'area %', { local: ['B.responseFactor'] });
		expect(() => ask(local, limit(50))).toThrow(/that of B is fitted or tied/);
		expect(ask(open, limit(50, '% of charge'))[0].note).toBeUndefined();
	});

	it('says so where it takes response factor 1 for every species', () => {
		const [until] = ask(decay(undefined, 'mol/L'), limit(50));
		expect(until.note).toBe('response factor 1 for every species');
	});
});
