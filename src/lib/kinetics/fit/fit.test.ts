import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { fitRequest, type FitReport } from '../../schemas/fit';
import { fit, FitCancelled, FitRequestError } from './fit';
import { plan } from './plan';

const fixture = (name: string) =>
	readFileSync(new URL(`../../../../tests/fixtures/${name}`, import.meta.url), 'utf8')
		.trim()
		.split(/\r?\n/)
		.slice(1)
		.map((line) => line.split(',').map(Number));

const rows = fixture('s01_clean_50C.csv');
const h1 = (over: Record<string, unknown> = {}, initial: unknown = { value: 0.5, unit: 'mol/L' }) => ({
	species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
	steps: [
		{
			id: 's1',
			reactant: 'A',
			products: [{ species: 'B', coefficient: 1 }],
			forward: { kRef: { value: 1, unit: '1/h' } },
			reverse: null
		},
		{
			id: 's2',
			reactant: 'B',
			products: [{ species: 'C', coefficient: 1 }],
			forward: { kRef: { value: 1, unit: '1/h' } },
			reverse: { kRef: { value: 1, unit: '1/h' } }
		}
	],
	referenceTemperature: { value: 50, unit: 'degC' },
	runs: [
		{
			id: 'r1',
			temperature: { value: 50, unit: 'degC' },
			initial: { A: initial },
			timeUnit: 'h',
			channels: ['A', 'B', 'C'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
			timepoints: rows.map(([time, A, B, C]) => ({ time, values: { A, B, C } }))
		}
	],
	options: {},
	...over
});
const parse = (json: unknown) => fitRequest.parse(json);
const of = (report: FitReport, id: string) => report.parameters.find((p) => p.id === id)!;

describe('the clean sheet at 50 °C, A → B ⇌ C (invented scenario HX-14)', () => {
	it('finds the three constants, their errors and correlation, with the charge fixed', () => {
		const report = fit(parse(h1()));
		expect(report.status).toBe('converged');
		expect(report.pointsUsed).toBe(33);
		expect(of(report, 's1.forward.kRef').estimate).toBeCloseTo(0.794, 3);
		expect(of(report, 's1.forward.kRef').standardError).toBeCloseTo(0.007, 3);
		expect(of(report, 's2.forward.kRef').estimate).toBeCloseTo(0.297, 3);
		expect(of(report, 's2.forward.kRef').standardError).toBeCloseTo(0.004, 3);
		expect(of(report, 's2.reverse.kRef').estimate).toBeCloseTo(0.0952, 4);
		expect(of(report, 's2.reverse.kRef').standardError).toBeCloseTo(0.003, 4);
		expect(report.residualStandardError).toBeCloseTo(0.0041, 4);
		expect(report.correlation[1][2]).toBeCloseTo(0.8, 2);
		const percents = report.massBalance[0].percent.map((p) => p.value);
		expect(Math.min(...percents)).toBeCloseTo(97.2, 6);
		expect(Math.max(...percents)).toBeCloseTo(101.6, 6);
	});

	it('counts the row at time zero when the charge is fitted', () => {
		const report = fit(parse(h1({}, { fit: true })));
		expect(report.pointsUsed).toBe(36);
		expect(of(report, 's1.forward.kRef').estimate).toBeCloseTo(0.7936, 4);
		expect(of(report, 's2.forward.kRef').estimate).toBeCloseTo(0.2963, 4);
		expect(of(report, 's2.reverse.kRef').estimate).toBeCloseTo(0.0947, 4);
		expect(of(report, 'r1.initial.A').estimate).toBeCloseTo(0.499, 4);
	});

	it('finds 145 units of AICc more for the scheme without the way back', () => {
		const irreversible = h1();
		irreversible.steps[1] = { ...irreversible.steps[1], reverse: null };
		const difference = fit(parse(irreversible)).aicc! - fit(parse(h1())).aicc!;
		expect(Math.round(difference)).toBe(145);
	});

	it('gives the same digits twice, and others for the equilibrium form of the same scheme only by rounding', () => {
		const request = parse(h1());
		const first = fit(request);
		expect(JSON.stringify(fit(request))).toBe(JSON.stringify(first));
		const equilibrium = h1();
		equilibrium.steps[1].reverse = { equilibriumConstant: { value: 2, unit: '1' } } as never;
		const second = fit(parse(equilibrium));
		expect(second.weightedSsr / first.weightedSsr).toBeCloseTo(1, 9);
		expect(of(second, 's2.reverse.equilibriumConstant').estimate).toBeCloseTo(3.12, 2);
	});

	it('keeps a tie and counts one parameter less', () => {
		const report = fit(
			parse(
				h1({ options: { tied: [{ parameter: 's2.reverse.kRef', to: 's2.forward.kRef', factor: 0.32 }] } })
			)
		);
		expect(report.fittedIds).toEqual(['s1.forward.kRef', 's2.forward.kRef']);
		const forward = of(report, 's2.forward.kRef');
		const reverse = of(report, 's2.reverse.kRef');
		expect(reverse.estimate / forward.estimate).toBeCloseTo(0.32, 12);
		expect(reverse.standardError! / forward.standardError!).toBeCloseTo(0.32, 12);
		expect(reverse.state).toBe('tied');
	});
});

describe('hooks', () => {
	it('stops when asked to', () => {
		let calls = 0;
		expect(() => fit(parse(h1()), { cancelled: () => ++calls > 20 })).toThrow(FitCancelled);
		expect(calls).toBe(21);
	});

	it('reports honest progress over the starts', () => {
		const seen: number[] = [];
		fit(parse(h1({ options: { starts: 7, profiles: false } })), {
			onProgress: (p) => p.stage.startsWith('searching') && seen.push(p.done)
		});
		expect(seen).toEqual([1, 2, 3, 4, 5, 6, 7]);
	});
});

describe('requests that cannot be fitted', () => {
	const codes = (json: unknown) => {
		try {
			fit(parse(json));
		} catch (error) {
			if (error instanceof FitRequestError) return error.issues.map((i) => i.code);
			throw error;
		}
		return [];
	};
	it('names unknown parameters, ties to themselves, circles and unlike ties', () => {
		expect(codes(h1({ options: { fixed: ['s9.forward.kRef'] } }))).toEqual(['parameter-unknown']);
		const tie = (parameter: string, to: string) => ({ options: { tied: [{ parameter, to }] } });
		expect(codes(h1(tie('s1.forward.kRef', 's1.forward.kRef')))).toEqual(['tied-to-itself']);
		expect(codes(h1(tie('s1.forward.kRef', 'r1.initial.A')))).toEqual(['tie-of-unlike']);
		expect(
			codes(
				h1({
					options: {
						tied: [
							{ parameter: 's1.forward.kRef', to: 's2.forward.kRef' },
							{ parameter: 's2.forward.kRef', to: 's1.forward.kRef' }
						]
					}
				})
			)
		).toContain('tie-circular');
	});

	it('refuses an activation energy from one temperature', () => {
		const json = h1();
		json.steps[0].forward = { ...json.steps[0].forward, activationEnergy: { fit: true } } as never;
		expect(codes(json)).toEqual(['one-temperature']);
	});

	it('refuses fewer values than parameters', () => {
		const json = h1();
		json.runs[0].timepoints = [{ time: 1, values: { A: 0.2, B: 0.2 } as never }];
		expect(codes(json)).toEqual(['too-few-points']);
	});

	it('plans the same without starting', () => {
		const planned = plan(parse(h1({ options: { fixed: ['s2.reverse.kRef'] } })));
		expect(planned.ready).toBe(true);
		expect(planned.parameters.map((p) => [p.id, p.state, p.value, p.unit])).toEqual([
			['s1.forward.kRef', 'fitted', 1, '1/h'],
			['s2.forward.kRef', 'fitted', 1, '1/h'],
			['s2.reverse.kRef', 'fixed', 1, '1/h']
		]);
		expect(planned.degreesOfFreedom).toBe(31);
	});
});
