/** Times that hardly come, never come, or are no times: plateaus, equilibria, flat maxima (invented data). */
import { describe, expect, it } from 'vitest';
import { fitRequest, type FitRequest } from '../../schemas/fit';
import { decisionQuantities, type DecisionQuestion } from './decision';
import { fit } from './fit';

const times = [0.5, 1, 2, 5, 20, 100];
const scatter = [0.004, -0.003, 0.002, -0.004, 0.003, -0.001];
const step = (id: string, from: string, to: string, reverse?: number) => ({
	id,
	reactant: from,
	products: [{ species: to }],
	forward: { kRef: { value: 1, unit: '1/h' } },
	reverse: reverse ? { kRef: { value: reverse, unit: '1/h' } } : null
});

function request(steps: object[], curves: Record<string, (t: number) => number>, bounds = {}): FitRequest {
	const ids = Object.keys(curves);
	return fitRequest.parse({
		species: ids.map((id) => ({ id })),
		steps,
		referenceTemperature: { value: 50, unit: 'degC' },
		runs: [
			{
				id: 'r1',
				temperature: { value: 50, unit: 'degC' },
				initial: { A: { value: 1, unit: 'mol/L' } },
				timeUnit: 'h',
				channels: ids.map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
				timepoints: times.map((time, k) => ({
					time,
					values: Object.fromEntries(ids.map((id, i) => [id, curves[id](time) + scatter[(k + 2 * i) % 6]]))
				}))
			}
		],
		options: { starts: 4, profiles: false, bounds }
	});
}

const asked = (given: FitRequest) => {
	const report = fit(given);
	return (question: DecisionQuestion) => decisionQuantities(report, given, 0, [question]);
};

describe('a product that comes to rest', () => {
	const ask = asked(request([step('s1', 'A', 'B')], { A: (t) => Math.exp(-t), B: (t) => 1 - Math.exp(-t) }));
	it('has no maximum, though its last values differ by rounding', () => {
		expect(ask({ kind: 'maximum', species: 'B' })).toEqual([]);
		expect(ask({ kind: 'maximum', species: 'A' })).toEqual([]);
	});
	it('reaches no level that it only tends to', () => {
		expect(ask({ kind: 'level', species: 'B', level: 1 })).toEqual([]);
		expect(ask({ kind: 'level', species: 'B', level: 0.999 })[0].value).toBeCloseTo(Math.log(1000), 1);
	});
});

describe('an equilibrium at 75 % conversion', () => {
	const ask = asked(
		request([step('s1', 'A', 'B', 0.3)], {
			A: (t) => 0.25 + 0.75 * Math.exp(-1.2 * t),
			B: (t) => 0.75 * (1 - Math.exp(-1.2 * t))
		})
	);
	const conversion = (share: number) => ask({ kind: 'conversion', species: 'A', conversion: share });
	it('never lets a conversion beyond it come', () => expect(conversion(0.9)).toEqual([]));
	it('leaves the time of a conversion just below it open towards later times: it may never come', () => {
		const [time] = conversion(0.748);
		expect(time.profileInterval![0]).toBeGreaterThan(3);
		expect(time.profileInterval![0]).toBeLessThan(time.value);
		expect(time.profileInterval![1]).toBeNull();
	});
	it('closes the interval of a conversion well below it on both sides', () => {
		const [time] = conversion(0.6);
		const exact = -Math.log(1 - 0.6 / 0.75) / 1.2;
		expect(time.profileInterval![0]).toBeLessThan(exact);
		expect(time.profileInterval![1]).toBeGreaterThan(exact);
	});
});

describe('a flat maximum', () => {
	const slow = 1e-5;
	const b = (t: number) => (Math.exp(-slow * t) - Math.exp(-t)) / (1 - slow);
	const ask = asked(
		request([step('s1', 'A', 'B'), step('s2', 'B', 'C')], {
			A: (t) => Math.exp(-t),
			B: b,
			C: (t) => 1 - Math.exp(-t) - b(t)
		})
	);
	it('is told with a height that is sharp and a time that is not', () => {
		const [time, value] = ask({ kind: 'maximum', species: 'B' });
		expect(value.standardError! / value.value).toBeLessThan(1e-3);
		expect(time.standardError! / time.value).toBeGreaterThan(0.02);
		const [low, high] = time.profileInterval!;
		// Fitted k2 lies near 1e-5 1/h; by 1/(k1 − k2) ln(k1/k2) the time moves by 1 h for a factor e in k2.
		expect(high === null || high - low! > 1).toBe(true);
	});
});

describe('a constant with a bound of the person', () => {
	const decay = { A: (t: number) => Math.exp(-t), B: (t: number) => 1 - Math.exp(-t) };
	const question: DecisionQuestion = { kind: 'conversion', species: 'A', conversion: 0.5 };
	const bounded = (lower: number) =>
		request([step('s1', 'A', 'B')], decay, { 's1.forward.kRef': { lower: { value: lower, unit: '1/h' } } });
	const estimate = fit(bounded(0.1)).parameters[0];

	it('closes the profile of a time where the bound leaves no later one', () => {
		const lower = estimate.estimate - 0.5 * estimate.standardError!;
		const [time] = asked(bounded(lower))(question);
		expect(time.heldBy).toBeUndefined();
		expect(time.profileInterval![1]! / (Math.LN2 / lower)).toBeCloseTo(1, 5);
		const [free] = asked(bounded(0.1))(question);
		expect(time.profileInterval![0]! / free.profileInterval![0]!).toBeCloseTo(1, 4);
	});

	it('gives no interval of width zero where the constant is held by it, but the profile within the bounds', () => {
		const lower = estimate.estimate + 0.5 * estimate.standardError!;
		const ask = asked(bounded(lower));
		const [time] = ask(question);
		expect(time).toMatchObject({ heldBy: ['s1.forward.kRef'], standardError: null, interval: null });
		expect(time.profileInterval![1]! / time.value).toBeCloseTo(1, 5);
		expect(time.profileInterval![0]! / time.value).toBeLessThan(0.999);
		const [a] = ask({ kind: 'composition', time: 1 });
		expect(a).toMatchObject({ heldBy: ['s1.forward.kRef'], standardError: null, interval: null });
	});
});
