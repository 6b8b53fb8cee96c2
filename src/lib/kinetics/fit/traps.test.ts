/** The traps that practitioners fall into; fixtures of the invented scenario HX-14. */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { fitRequest, type FitReport } from '../../schemas/fit';
import { fit } from './fit';
import { plan } from './plan';
import { temperatureLine } from './straight-line';

const fixture = (name: string) =>
	readFileSync(new URL(`../../../../tests/fixtures/${name}`, import.meta.url), 'utf8')
		.trim()
		.split(/\r?\n/)
		.slice(1)
		.map((line) => line.split(',').map(Number));
const of = (report: FitReport, id: string) => report.parameters.find((p) => p.id === id)!;
const codes = (report: FitReport) => report.findings.map((f) => f.code);
const finding = (report: FitReport, code: string) => report.findings.find((f) => f.code === code)!;
const step = (id: string, from: string, to: string, k = 0.5) => ({
	id,
	reactant: from,
	products: [{ species: to }],
	forward: { kRef: { value: k, unit: '1/h' } },
	reverse: null as unknown
});
const request = (steps: unknown[], runs: unknown[], options: unknown = {}) =>
	fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
		steps,
		referenceTemperature: { value: 50, unit: 'degC' },
		runs,
		options
	});
const at50 = { temperature: { value: 50, unit: 'degC' }, timeUnit: 'h' };
const charge = { A: { value: 1, unit: 'mol/L' } };

describe('only B assayed, with an unknown response factor, in A → B → C', () => {
	const json = request(
		[step('s1', 'A', 'B'), step('s2', 'B', 'C')],
		[
			{
				...at50,
				initial: charge,
				channels: [{ id: 'B', weights: { B: 1 }, unit: 'area', responseFactor: { fit: true } }],
				timepoints: fixture('s03_B_signal_only.csv').map(([time, B]) => ({ time, values: { B } }))
			}
		]
	);

	it('warns of two solutions before the fit', () => {
		expect(plan(json).issues.map((i) => i.code)).toContain('exchange-symmetry');
	});

	it('reports both solutions, refuses a single answer and names the sample that decides', () => {
		const report = fit(json);
		const rival = report.alternatives[0];
		expect(rival.weightedSsr / report.weightedSsr).toBeCloseTo(1, 6);
		const found = [
			[
				of(report, 's1.forward.kRef').estimate,
				of(report, 's2.forward.kRef').estimate,
				of(report, 'B.responseFactor').estimate
			],
			[
				rival.parameters['s1.forward.kRef'],
				rival.parameters['s2.forward.kRef'],
				rival.parameters['B.responseFactor']
			]
		].sort((a, b) => b[0] - a[0]);
		[0.8, 0.15, 1.0].forEach((v, i) => expect(found[0][i]).toBeCloseTo(v, 2));
		[0.15, 0.8, 5.33].forEach((v, i) => expect(found[1][i]).toBeCloseTo(v, 1));
		expect(report.findings[0].code).toBe('ambiguous-solutions');
		expect(report.findings[0].level).toBe('stop');
		expect(report.findings[0].message).toMatch(/A at 2 h/);
		expect(report.findings[0].message).toMatch(/20 %/);
		expect(report.findings[0].message).toMatch(/74 %/);
	});
});

describe('the clean sheet cut at one hour', () => {
	it('says that the way back is not identifiable, and that a simpler scheme does as well', () => {
		const report = fit(
			request(
				[step('s1', 'A', 'B'), { ...step('s2', 'B', 'C'), reverse: { kRef: { value: 0.5, unit: '1/h' } } }],
				[
					{
						...at50,
						initial: { A: { value: 0.5, unit: 'mol/L' } },
						channels: ['A', 'B', 'C'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
						timepoints: fixture('s01_clean_50C.csv')
							.filter(([time]) => time <= 1)
							.map(([time, A, B, C]) => ({ time, values: { A, B, C } }))
					}
				]
			)
		);
		expect(of(report, 's1.forward.kRef').estimate).toBeCloseTo(0.8, 1);
		const back = of(report, 's2.reverse.kRef');
		expect(back.estimate).toBeCloseTo(0.89, 2);
		expect(back.standardError).toBeCloseTo(1.8, 1);
		expect(report.correlation[1][2]).toBeCloseTo(0.98, 2);
		expect(back.profileCi95![0]).toBeNull();
		expect(finding(report, 'not-identifiable').message).toMatch(/not identifiable/);
		expect(finding(report, 'not-identifiable').message).toMatch(/[Ll]ater samples/);
		expect(codes(report)).toContain('simpler-scheme');
	});
});

describe('quench lag', () => {
	const rows = fixture('s08_quench_lag.csv').map(([time, A]) => ({ time, values: { A } }));
	const lag = (over: Record<string, unknown>) =>
		fit(
			request(
				[{ ...step('s1', 'A', 'B'), forward: { kRef: { value: 5, unit: '1/h' } } }],
				[
					{
						...at50,
						timeUnit: 'min',
						initial: { A: { value: 1, unit: 'fraction' } },
						channels: [{ id: 'A', weights: { A: 1 }, unit: 'fraction' }],
						timepoints: rows,
						...over
					}
				]
			)
		);

	it('biases the constant when time zero and charge are held', () => {
		const report = lag({});
		expect(of(report, 's1.forward.kRef').estimate).toBeCloseTo(7.39, 2);
		const proposal = finding(report, 'time-offset-explains').message;
		expect(proposal).toMatch(/1\.5 min/);
		expect(proposal).toMatch(/s1\.forward\.kRef 6 1\/h/);
	});

	it('is recovered by a time offset, which is reported', () => {
		const report = lag({ timeOffset: { fit: true } });
		expect(of(report, 's1.forward.kRef').estimate).toBeCloseTo(6.0, 2);
		const offset = of(report, 'r1.timeOffset');
		expect([offset.estimate.toFixed(2), offset.unit]).toEqual(['1.50', 'min']);
		expect(codes(report)).toContain('time-offset');
		expect(codes(report)).toContain('offset-or-charge');
	});

	it('cannot be told from another charge, and says so', () => {
		const report = lag({ initial: { A: { fit: true, guess: { value: 1, unit: 'fraction' } } } });
		expect(of(report, 's1.forward.kRef').estimate).toBeCloseTo(6.0, 2);
		expect(of(report, 'r1.initial.A').estimate).toBeCloseTo(0.861, 3);
		expect(finding(report, 'offset-or-charge').message).toMatch(/cannot be told apart/);
	});

	it('finds nothing determined when both are fitted', () => {
		const report = lag({
			initial: { A: { fit: true, guess: { value: 1, unit: 'fraction' } } },
			timeOffset: { fit: true }
		});
		expect(codes(report)).toContain('structurally-undetermined');
		expect(of(report, 's1.forward.kRef').estimate).toBeCloseTo(6.0, 2);
		expect(of(report, 'r1.initial.A').standardError).toBeNull();
	});
});

describe('area %', () => {
	const area = (responseFactor?: unknown) =>
		fit(
			request(
				[step('s1', 'A', 'B')],
				[
					{
						...at50,
						initial: charge,
						channels: [
							{ id: 'A', weights: { A: 1 }, unit: 'area %' },
							{ id: 'B', weights: { B: 1 }, unit: 'area %', ...(responseFactor ? { responseFactor } : {}) }
						],
						timepoints: [
							[0, 100],
							[0.446, 59.32],
							[0.998, 33.83],
							[2.012, 13.51],
							[3.745, 3.18]
						].map(([time, A]) => ({ time, values: { A } }))
					}
				],
				{ starts: 5 }
			)
		);

	it('biases k by a third when response factors are ignored, and not when they are given', () => {
		const plain = area();
		expect(of(plain, 's1.forward.kRef').estimate).toBeCloseTo(1.09, 2);
		expect(finding(plain, 'area-percent').level).toBe('caution');
		const corrected = area({ value: 1.6, unit: '1' });
		expect(of(corrected, 's1.forward.kRef').estimate).toBeCloseTo(0.8, 2);
	});
});

describe('hidden autocatalysis', () => {
	const report = fit(
		request(
			[step('s1', 'A', 'B')],
			[
				{
					...at50,
					replicates: 'samples',
					initial: { A: { value: 1, unit: 'fraction' } },
					channels: [{ id: 'A', weights: { A: 1 }, unit: 'fraction' }],
					timepoints: fixture('s09_autocat.csv').flatMap(([time, one, two]) => [
						{ time, values: { A: one } },
						{ time, values: { A: two } }
					])
				}
			]
		)
	);

	it('shows the failure before anything else, with its numbers', () => {
		expect(of(report, 's1.forward.kRef').estimate).toBeCloseTo(0.528, 3);
		expect(report.lackOfFit!.f).toBeCloseTo(45.4, 1);
		expect([report.lackOfFit!.df1, report.lackOfFit!.df2]).toEqual([8, 9]);
		expect(report.lackOfFit!.critical).toBeCloseTo(3.23, 2);
		expect(report.findings[0].code).toBe('lack-of-fit');
		expect(report.findings[0].level).toBe('stop');
	});

	it('names the alternatives and adds the caution about heat', () => {
		const text = finding(report, 'acceleration').message;
		expect(text).toMatch(/[Aa]utocatalysis/);
		expect(text).toMatch(/charge/);
		expect(text).toMatch(/heat/);
		expect(text).not.toMatch(/safe\b|\bOK\b|cleared|pass\b/);
	});

	it('is the same from two channels in place of two rows', () => {
		const two = fit(
			request(
				[step('s1', 'A', 'B')],
				[
					{
						...at50,
						initial: { A: { value: 1, unit: 'fraction' } },
						channels: ['A1', 'A2'].map((id) => ({ id, weights: { A: 1 }, unit: 'fraction' })),
						timepoints: fixture('s09_autocat.csv').map(([time, A1, A2]) => ({ time, values: { A1, A2 } }))
					}
				]
			)
		);
		expect(two.lackOfFit!.f).toBeCloseTo(45.4, 1);
	});
});

describe('constants at four temperatures', () => {
	it('gives energy, interpolated and extrapolated constants with intervals, and marks extrapolation', () => {
		const rows = fixture('s07_rate_constants_T.csv');
		const line = temperatureLine(
			rows.map(([t]) => t + 273.15),
			rows.map(([, k]) => k)
		);
		expect(line.energyJPerMol / 1000).toBeCloseTo(76.3, 1);
		expect(line.energyError / 1000).toBeCloseTo(0.4, 1);
		expect(line.referenceTemperatureK - 273.15).toBeCloseTo(44.6, 1);
		expect(Math.abs(line.line.correlation)).toBeCloseTo(0.9994, 4);
		const inside = line.at(45 + 273.15);
		expect(inside.k).toBeCloseTo(0.47, 2);
		expect(inside.interval[0]).toBeCloseTo(0.46, 2);
		expect(inside.interval[1]).toBeCloseTo(0.48, 2);
		expect(inside.extrapolated).toBe(false);
		const beyond = line.at(85 + 273.15);
		expect(beyond.k).toBeCloseTo(11.8, 1);
		expect(beyond.interval[0]).toBeCloseTo(11.0, 1);
		expect(beyond.interval[1]).toBeCloseTo(12.7, 1);
		expect(beyond.extrapolated).toBe(true);
		const eyring = temperatureLine(
			rows.map(([t]) => t + 273.15),
			rows.map(([, k]) => k / 3600),
			'eyring'
		);
		expect(eyring.energyJPerMol / 1000).toBeCloseTo(73.7, 1);
	});
});
