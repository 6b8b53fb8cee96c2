import { describe, expect, it } from 'vitest';
import { firstFormRequest, type FirstFormRequestInput, type FirstFormResult } from '../../schemas/window';
import type { SchemeContent } from '../../schemas/scheme';
import { studentQuantile } from '../fit/distributions';
import { firstFormWindow, roundTwoDigits, WindowRefusal, type FirstFormInput } from './index';

type Steps = [id: string, from: string, to: string, k: number, energy: number, error: number][];

/** A fit with independent relative errors of its constants; energies are fixed. */
function input(
	steps: Steps,
	request: FirstFormRequestInput,
	studied: [number, number],
	degreesOfFreedom = 10
): FirstFormInput {
	const ids = [...new Set(steps.flatMap(([, a, b]) => [a, b]))];
	const scheme: SchemeContent = {
		species: ids.map((id) => ({ id, name: '' })),
		steps: steps.map(([id, from, to, k, energy]) => ({
			id,
			reactant: from,
			products: [{ species: to, coefficient: 1 }],
			forward: { kRef: { value: k, unit: '1/h' }, activationEnergy: { value: energy, unit: 'kJ/mol' } },
			reverse: null
		})),
		referenceTemperature: { value: 40, unit: 'degC' }
	};
	return {
		scheme,
		fit: {
			parameters: steps.map(([id, , , k, , error]) => ({
				id: `${id}.forward.kRef`,
				estimate: k,
				standardError: k * error,
				ci95: null,
				profileCi95: null,
				unit: '1/h',
				state: 'fitted'
			})),
			fittedIds: steps.map(([id]) => `${id}.forward.kRef`),
			covariance: steps.map((a, i) => steps.map((_, j) => (i === j ? a[5] ** 2 : 0))),
			scales: steps.map(() => 'ln' as const),
			degreesOfFreedom,
			studied: { temperatureC: studied, chargeMolPerL: { A: [0.4, 0.5], B: [0.5, 0.5] }, lastTimeH: 8 }
		},
		request: firstFormRequest.parse(request)
	};
}

const window: Steps = [
	['s1', 'A', 'B', 1.2, 72, 0.01],
	['s2', 'B', 'C', 0.008, 98, 0.02]
];
const limits: FirstFormRequestInput['criteria'] = [
	{ species: 'A', relation: 'NMT', limit: 1, unit: '% of charge' },
	{ species: 'C', relation: 'NMT', limit: 3, unit: '% of charge' }
];
const at = (celsius: number, more: Partial<FirstFormRequestInput> = {}): FirstFormRequestInput => ({
	temperature: { value: celsius, unit: 'degC' },
	charge: { A: { value: 0.5, unit: 'mol/L' } },
	criteria: limits,
	...more
});

describe('the window of the invented case A → B → C (40 °C, A NMT 1.0 %, C NMT 3.0 %)', () => {
	const result40 = firstFormWindow(input(window, at(40), [30, 50]));

	it('holds from 3.84 to 4.64 h, with the limit that binds at each edge', () => {
		const { hold, criteria, outsideStudied, summary } = result40;
		expect(hold!.spans.length).toBe(1);
		expect(hold!.spans[0].from).toBeCloseTo(3.84, 2);
		expect(hold!.spans[0].to).toBeCloseTo(4.64, 2);
		expect(hold!.spans[0]).toMatchObject({ bindsFrom: 0, bindsTo: 1 });
		expect(outsideStudied).toBe(false);
		expect(criteria[0].text).toBe('A NMT 1 % of charge');
		expect(summary).toBe('40 °C: every criterion holds from 3.84 to 4.64 h');
	});

	it('gives intervals that agree with those of the constants alone, and with first order', () => {
		const { hold, criteria } = result40;
		const t = studentQuantile(0.975, 10);
		// The opening is ln 100/k1: its interval follows from k1 (1 ± t · 1 %).
		const opening = Math.log(100) / 1.2;
		expect(criteria[0].from.interval![0]! / (opening / (1 + 0.01 * t))).toBeCloseTo(1, 3);
		expect(criteria[0].from.interval![1]! / (opening / (1 - 0.01 * t))).toBeCloseTo(1, 3);
		expect(hold!.from.firstOrder![0]).toBeCloseTo(opening * (1 - 0.01 * t), 4);
		const { interval, firstOrder, value } = hold!.to;
		expect(interval![0]! - value!).toBeCloseTo(firstOrder![0] - value!, 1);
		expect(hold!.robust!.from).toBeGreaterThan(hold!.spans[0].from);
		expect(hold!.robust!.to!).toBeLessThan(hold!.spans[0].to!);
		expect(hold!.stated).toEqual({
			from: roundTwoDigits(hold!.robust!.from, 'up'),
			to: roundTwoDigits(hold!.robust!.to!, 'down')
		});
	});

	it('is empty with k1 − 10 % and k2 + 25 %, and at 50 °C', () => {
		const adverse: Steps = [
			['s1', 'A', 'B', 1.2 * 0.9, 72, 0.01],
			['s2', 'B', 'C', 0.008 * 1.25, 98, 0.02]
		];
		const { hold, criteria } = firstFormWindow(input(adverse, at(40), [30, 50]));
		expect(hold!.spans).toEqual([]);
		expect(hold!.from.state).toBe('never');
		expect(hold!.sentence).toMatch(/^No time meets every criterion\./);
		expect(criteria[0].from.value).toBeCloseTo(4.26, 2);
		expect(criteria[1].to.value).toBeCloseTo(3.96, 2);
		expect(firstFormWindow(input(window, at(50), [30, 50])).hold!.spans).toEqual([]);
	});

	it('says in how many draws no time is left, and gives no robust span when those are many', () => {
		const poor: Steps = [
			['s1', 'A', 'B', 1.2, 72, 0.08],
			['s2', 'B', 'C', 0.008, 98, 0.12]
		];
		const { hold } = firstFormWindow(input(poor, at(40), [30, 50]));
		expect(hold!.neverPercent).toBeGreaterThan(5);
		expect(hold!.robust).toBeNull();
		expect(hold!.stated).toBeNull();
		expect(hold!.sentence).toMatch(
			/No time meets every criterion at 95 % confidence\. None at all in .* % of the draws\./
		);
	});

	it('gives the maximum of B with the span within 1 %', () => {
		const { maxima } = result40;
		const b = maxima.find((m) => m.species === 'B')!;
		expect(b.kind).toBe('interior');
		expect(b.time.value).toBeCloseTo(Math.log(150) / 1.192, 10);
		expect(b.percentOfCharge.value).toBeCloseTo(100 * 150 ** (-0.008 / 1.192), 10);
		expect(b.withinOnePercent!.from.value!).toBeLessThan(b.time.value!);
		expect(b.sentence).toMatch(/^B is highest at 4\.20 h \(95 % interval/);
		expect(maxima.map((m) => m.kind)).toEqual(['at start', 'interior', 'at end']);
	});

	it('refuses a fit whose constants are local to its runs: they are no k(T)', () => {
		const given = input(window, at(40), [30, 50]);
		const [first, second] = given.fit.parameters;
		const local = { ...given.fit, parameters: [{ ...first, id: 'r1.s1.forward.k' }, second] };
		expect(() => firstFormWindow({ ...given, fit: local })).toThrow(/shared by all runs/);
	});

	it('refuses a temperature outside the studied range, or marks it', () => {
		expect(() => firstFormWindow(input(window, at(45), [30, 40]))).toThrow(WindowRefusal);
		expect(() => firstFormWindow(input(window, at(45), [30, 40]))).toThrow(
			/outside the studied range.*30 to 40 °C/
		);
		const result = firstFormWindow(input(window, at(45, { allowOutsideStudied: true }), [30, 40]));
		expect(result.outsideStudied).toBe(true);
		expect(result.notes.map((n) => n.code)).toContain('outside-studied-range');
		expect(result.hold!.spans[0].from).toBeCloseTo(2.48, 2);
	});

	it('gives the same bits for the same seed and other draws for another', () => {
		const once = JSON.stringify(result40);
		expect(JSON.stringify(firstFormWindow(input(window, at(40), [30, 50])))).toBe(once);
		const other = firstFormWindow(input(window, at(40, { seed: 2 }), [30, 50]));
		expect(JSON.stringify(other)).not.toBe(once);
		expect(other.hold!.robust!.to! / (JSON.parse(once) as FirstFormResult).hold!.robust!.to!).toBeCloseTo(
			1,
			2
		);
	});
});

describe('the hold time of the invented case B → D (k 2.1e-5 ± 3e-6 1/h, 10 degrees of freedom, D NMT 0.10 %)', () => {
	const hold: Steps = [['s1', 'B', 'D', 2.1e-5, 0, 3e-6 / 2.1e-5]];
	const request: FirstFormRequestInput = {
		temperature: { value: 40, unit: 'degC' },
		charge: { B: { value: 0.5, unit: 'mol/L' } },
		criteria: [{ species: 'D', relation: 'NMT', limit: 0.1, unit: '% of charge' }]
	};

	it('is 47.6 h, 37.8 h at the one-sided 95 % bound, and shown as 37 h', () => {
		for (const seed of [1, 2, 3]) {
			const result = firstFormWindow(input(hold, { ...request, seed }, [40, 40]));
			expect(result.hold!.spans[0].to).toBeCloseTo(47.6, 1);
			// Exactly 37.84 h; 2 000 low-discrepancy draws find it to some 0.1 %.
			expect(Math.abs(result.hold!.to.lower! - 37.84)).toBeLessThan(0.08);
			expect(Math.abs(result.hold!.robust!.to! - 37.84)).toBeLessThan(0.08);
			expect(result.hold!.stated).toEqual({ from: 0, to: 37 });
		}
		expect(studentQuantile(0.95, 10) * 3e-6 + 2.1e-5).toBeCloseTo(2.64e-5, 7);
	});
});

describe('cases without an interval or an end', () => {
	it('gives figures without intervals where a constant is not determined', () => {
		const poor = input(window, at(40), [30, 50]);
		poor.fit.covariance[1][1] = null as unknown as number;
		const { hold, notes, varied } = firstFormWindow(poor);
		expect(hold!.spans.length).toBe(1);
		expect(hold!.to.interval).toBeNull();
		expect(hold!.robust).toBeNull();
		expect(varied).toEqual([]);
		expect(notes.map((n) => n.code)).toContain('not-determined');
	});

	it('says never with the equilibrium', () => {
		const reversible = input(
			[['s1', 'A', 'B', 1, 0, 0.01]],
			at(40, { criteria: [{ species: 'B', relation: 'NLT', limit: 40, unit: '% of charge' }] }),
			[40, 40]
		);
		reversible.scheme.steps[0].reverse = { kRef: { value: 3, unit: '1/h' } };
		const { criteria, hold } = firstFormWindow(reversible);
		expect(criteria[0].never).toBe('equilibrium at 25.0 % of charge');
		expect(criteria[0].sentence).toBe(
			'B NLT 40 % of charge: never: equilibrium at 25.0 % of charge. Never met in 100 % of the draws.'
		);
		expect(hold!.spans).toEqual([]);
	});

	it('says with what factors a limit in area % is counted', () => {
		const notesFor = (unit: 'area %' | '% of charge', responseFactors = {}) => {
			const criteria = [{ species: 'A', relation: 'NMT', limit: 1, unit } as const];
			return firstFormWindow(input(window, at(40, { criteria, responseFactors }), [30, 50])).notes;
		};
		const code = 'area-percent-factors';
		const found = notesFor('area %').find((note) => note.code === code);
		expect(found).toMatchObject({ level: 'caution' });
		expect(found!.message).toMatch(/response factor 1 for every species/);
		expect(notesFor('area %', { B: 1.4 }).find((note) => note.code === code)!.message).toMatch(
			/B 1\.4, and 1/
		);
		expect(notesFor('% of charge').map((note) => note.code)).not.toContain(code);
	});

	it('names what is missing', () => {
		const fail = (request: Partial<FirstFormRequestInput>) => () =>
			firstFormWindow(input(window, at(40, request), [30, 50]));
		expect(fail({ charge: {} })).toThrow(/Nothing is charged/);
		expect(fail({ charge: { X: { value: 1, unit: 'mol/L' } } })).toThrow(/does not have/);
		expect(fail({ charge: { A: { value: 1, unit: 'g/L' } } })).toThrow(/molar mass/);
		expect(fail({ temperature: { value: 40, unit: 'h' } })).toThrow(/temperature is expected/);
	});

	it('rounds a hold down and an opening up', () => {
		expect(roundTwoDigits(37.8, 'down')).toBe(37);
		expect(roundTwoDigits(4.639, 'down')).toBe(4.6);
		expect(roundTwoDigits(3.838, 'up')).toBe(3.9);
		expect(roundTwoDigits(0.526, 'down')).toBe(0.52);
		expect(roundTwoDigits(125, 'down')).toBe(120);
		expect(roundTwoDigits(4.6, 'down')).toBe(4.6);
		expect(roundTwoDigits(0, 'up')).toBe(0);
	});
});
