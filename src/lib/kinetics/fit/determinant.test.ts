import { describe, expect, it } from 'vitest';
import pinene from '../../../../tests/reference/c01_alpha_pinene_189C.json';
import { fitRequest, type FitReport } from '../../schemas/fit';
import { predict } from './bands';
import { compareSchemes, ComparisonError } from './compare';
import { decisionQuantities } from './decision';
import { dependenciesOf, recordedStep } from './dependencies';
import { fit, FitRequestError } from './fit';
import { jointRegion } from './joint-region';
import { plan } from './plan';
import { profileCurves } from './profile-curve';
import { bootstrap, leaveOneRunOut } from './refit';
import { samplingPlan } from './sampling-plan';
import { normalNumbers, uniformNumbers } from './sequence';

const NAMES = ['A', 'B', 'C', 'D', 'E'];
const step = (pair: string, i: number, k: number, unit: string) => ({
	id: `s${i + 1}`,
	reactant: pair[0],
	products: [{ species: pair[1] }],
	forward: { kRef: { value: k, unit } }
});
const alphaPinene = (options: object) =>
	fitRequest.parse({
		species: NAMES.map((id) => ({ id })),
		steps: ['AB', 'AC', 'CD', 'CE', 'EC'].map((pair, i) => step(pair, i, 1e-5, '1/min')),
		referenceTemperature: { value: 189.5, unit: 'degC' },
		runs: [
			{
				id: 'r1',
				temperature: { value: 189.5, unit: 'degC' },
				initial: { A: { value: 100, unit: '%' } },
				timeUnit: 'min',
				channels: NAMES.map((id) => ({ id, weights: { [id]: 1 }, unit: '%' })),
				timepoints: pinene.data.times.map((time, i) => ({
					time,
					values: Object.fromEntries(NAMES.map((id, j) => [id, pinene.data.observations[i][j]]))
				}))
			}
		],
		options: { starts: 8, ...options }
	});
const estimates = (report: FitReport) => report.parameters.map((p) => p.estimate);

describe('alpha-pinene by the determinant criterion (data: Fuguitt & Hawkins 1947; treatment: Box et al. 1973)', () => {
	const request = alphaPinene({ criterion: 'determinant' });
	const report = fit(request);

	/*
	 * No table of the published treatment is at hand. Held instead to an independent minimisation, made once with SciPy 1.17: curves
	 * by scipy.linalg.expm; dependencies from the singular values of the centred table, columns divided by their rounding error
	 * (10⁻ᵈ/√12, d the decimals recorded), up to 10 times the variance of rounding, the plain sum put in exactly; the rest spanned
	 * by scipy.linalg.null_space; ln|S| by slogdet, minimised by Nelder–Mead from twelve scattered starts (all ended within 1e-7),
	 * then by Newton steps with complex-step gradients and their central differences; errors √(2/3 · H⁻¹).
	 */
	it('reaches the constants of an independent brute-force minimisation', () => {
		const expected = [
			5.9533944986279075e-5, 2.839216393697343e-5, 4.0979678208445835e-6, 3.130265067498701e-4,
			5.7497503477926514e-5
		];
		expect(report.status).toBe('converged');
		estimates(report).forEach((k, i) => expect(k / expected[i], `k${i + 1}`).toBeCloseTo(1, 7));
		expect(report.determinant!.logDeterminant).toBeCloseTo(3.338274644250813, 9);
		expect(report.determinant!.logDeterminantLeastSquares).toBeGreaterThan(4.3);
	});

	it('lies by the published constants 5.95, 2.84, 0.43, 31.3 and 5.74 · 10⁻⁵ 1/min (from memory) as far as they are determined', () => {
		[5.95e-5, 2.84e-5, 0.43e-5, 31.3e-5, 5.74e-5].forEach((k, i) => {
			const { estimate, logStandardError } = report.parameters[i];
			expect(Math.abs(Math.log(estimate / k))).toBeLessThan(0.05 * logStandardError!);
		});
	});

	it('gives the errors that the second derivatives give, on rows − parameters degrees of freedom', () => {
		const errors = [
			0.022421505404066847, 0.04476475461898749, 4.3887851630281345, 0.13676595466449676, 0.2364501069829493
		];
		report.parameters.forEach((p, i) => expect(p.logStandardError! / errors[i]).toBeCloseTo(1, 5));
		expect(report.correlation[3][4]).toBeCloseTo(0.830523411728889, 5);
		expect(report.correlation[0][1]).toBeCloseTo(-0.24932079999843315, 5);
		expect(report.degreesOfFreedom).toBe(3);
		// t(0.975, 3) = 3.182446
		const [first] = report.parameters;
		expect((first.ci95![1] - first.estimate) / first.standardError!).toBeCloseTo(3.182446305284263, 8);
	});

	it('finds the two linear dependencies that Box et al. found, and says them', () => {
		const { dependencies, responses } = report.determinant!;
		expect(responses).toEqual(NAMES);
		expect(dependencies).toHaveLength(2);
		expect(dependencies[0].words).toBe('A + B + C + D + E is the same in every row within rounding (100.1)');
		// Pyronene was entered as 3 % of what had reacted: up to the mass balance, D = 0.03 (100 − A).
		expect(dependencies[1].words).toMatch(/^D follows from the others within rounding/);
		const note = report.findings.find((f) => f.code === 'responses-dependent')!;
		expect(note.message).toContain('3 independent combinations of 5 responses count');
	});

	it('says nothing that rests on sums of squares', () => {
		expect(report.criterion).toBe('determinant');
		expect([report.residualStandardError, report.aicc, report.bic, report.lackOfFit]).toEqual([
			null,
			null,
			null,
			null
		]);
		expect(report.parameters.every((p) => p.profileCi95 === null)).toBe(true);
		expect(() => jointRegion(report, request, ['s1.forward.kRef', 's2.forward.kRef'])).toThrow(
			/least squares/
		);
		expect(() => bootstrap(report, request)).toThrow(/least squares/);
		expect(() => profileCurves(report, request)).toThrow(/least squares/);
		expect(() => leaveOneRunOut(report, request)).toThrow(/least squares/);
		expect(() =>
			samplingPlan(request, report, request.runs[0], { samples: 2, earliest: 10, latest: 40000 })
		).toThrow(/least squares/);
		expect(() =>
			compareSchemes([
				{ name: 'a', request, report },
				{ name: 'b', request, report }
			])
		).toThrow(ComparisonError);
	});

	it('answers what people decide by without a profile', () => {
		const [time] = decisionQuantities(report, request, 0, [{ kind: 'maximum', species: 'C' }]);
		expect(time.standardError!).toBeGreaterThan(0);
		expect(time.profileInterval).toBeNull();
	});

	it('draws bands from its own covariance and the scatter of each response', () => {
		const { series } = predict(report, request, request.runs[0], [10000]);
		const of = (kind: string, id: string) => series.find((s) => s.kind === kind && s.id === id)!;
		const b = of('channel', 'B');
		const half = b.confidence![1][0] - b.curve[0];
		const wide = b.prediction![1][0] - b.curve[0];
		const variance = report.determinant!.residualCovariance[1][1];
		// t² (g C g + s_B²) less t² g C g
		expect((wide ** 2 - half ** 2) / (3.182446305284263 ** 2 * variance)).toBeCloseTo(1, 7);
		// A at t depends on k₁ + k₂ alone: its error by hand from the covariance.
		const [k1, k2] = estimates(report);
		const c = report.covariance;
		const gradient = [k1, k2].map((k) => -100 * 10000 * k * Math.exp(-(k1 + k2) * 10000));
		const own =
			gradient[0] ** 2 * c[0][0] + 2 * gradient[0] * gradient[1] * c[0][1] + gradient[1] ** 2 * c[1][1];
		const a = of('channel', 'A');
		expect((a.confidence![1][0] - a.curve[0]) / (3.182446305284263 * Math.sqrt(own))).toBeCloseTo(1, 6);
	});
});

/** A → B → C with A and B assayed; the errors of a row go together (correlation 0.95) and differ tenfold in size. */
function correlated(options: object, unitB = 'mol/L') {
	const normal = normalNumbers(uniformNumbers(8));
	const factor = unitB === 'mol/L' ? 1 : 1000;
	return fitRequest.parse({
		species: ['A', 'B', 'C'].map((id) => ({ id })),
		steps: ['AB', 'BC'].map((pair, i) => step(pair, i, 0.5, '1/h')),
		referenceTemperature: { value: 25, unit: 'degC' },
		runs: [
			{
				temperature: { value: 25, unit: 'degC' },
				initial: { A: { value: 1, unit: 'mol/L' } },
				timeUnit: 'h',
				channels: [
					{ id: 'A', weights: { A: 1 }, unit: 'mol/L' },
					{ id: 'B', weights: { B: 1 }, unit: unitB }
				],
				timepoints: Array.from({ length: 20 }, (_, k) => {
					const time = 0.2 * (k + 1);
					const [u, v] = [normal(), normal()];
					const a = Math.exp(-0.9 * time);
					const b = (0.9 / (0.3 - 0.9)) * (a - Math.exp(-0.3 * time));
					const values = {
						A: a + 0.02 * u,
						B: factor * (b + 0.002 * (0.95 * u + Math.sqrt(1 - 0.95 ** 2) * v))
					};
					return { time, values };
				})
			}
		],
		options: { starts: 4, profiles: false, ...options }
	});
}

describe('responses whose errors go together', () => {
	const report = fit(correlated({ criterion: 'determinant' }));

	it('are described by their covariance, and the constants do not depend on the units of the responses', () => {
		const other = fit(correlated({ criterion: 'determinant' }, 'mmol/L'));
		estimates(other).forEach((k, i) => expect(k / estimates(report)[i]).toBeCloseTo(1, 8));
		other.parameters.forEach((p, i) =>
			expect(p.standardError! / report.parameters[i].standardError!).toBeCloseTo(1, 5)
		);
		const { residualCovariance: c, residualCorrelation: r, dependencies } = report.determinant!;
		expect(dependencies).toEqual([]);
		expect(r[0][1]).toBeGreaterThan(0.8);
		expect(Math.sqrt(c[0][0]) / 0.02).toBeGreaterThan(0.6);
		expect(Math.sqrt(c[1][1]) / 0.002).toBeLessThan(1.6);
	});

	it('minimise the determinant: no neighbour on a grid has a smaller one', () => {
		const value = ([k1, k2]: number[]) => {
			let [aa, ab, bb] = [0, 0, 0];
			for (const { time, values } of correlated({}).runs[0].timepoints) {
				const a = Math.exp(-k1 * time) - (values.A as number);
				const b = (k1 / (k2 - k1)) * (Math.exp(-k1 * time) - Math.exp(-k2 * time)) - (values.B as number);
				aa += a * a;
				ab += a * b;
				bb += b * b;
			}
			return Math.log(aa * bb - ab * ab);
		};
		const best = estimates(report);
		expect(report.determinant!.logDeterminant).toBeCloseTo(value(best), 9);
		for (let i = -4; i <= 4; i++)
			for (let j = -4; j <= 4; j++)
				if (i || j)
					expect(value([best[0] * (1 + 1e-4 * i), best[1] * (1 + 1e-4 * j)])).toBeGreaterThan(value(best));
	});

	it('give the constants with a smaller error than plain least squares, which the noisy response rules', () => {
		const plain = fit(correlated({}));
		report.parameters.forEach((p, i) =>
			expect(p.standardError!).toBeLessThan(0.5 * plain.parameters[i].standardError!)
		);
		expect(Math.abs(report.parameters[1].estimate - 0.3)).toBeLessThan(
			3 * report.parameters[1].standardError!
		);
	});

	it('count complete rows only, and say how many were left out', () => {
		const gaps = correlated({ criterion: 'determinant' });
		gaps.runs[0].timepoints[3].values.B = null;
		gaps.runs[0].timepoints[4].values.A = { below: 0.5 };
		const found = fit(gaps);
		expect(found.determinant).toMatchObject({ rows: 18, rowsLeftOut: 2 });
		expect(found.findings.find((f) => f.code === 'determinant-rows')?.message).toContain('18 rows count');
	});

	it('need two channels, the same in every run, and rows enough', () => {
		const codes = (change: (r: ReturnType<typeof correlated>) => void) => {
			const request = correlated({ criterion: 'determinant' });
			change(request);
			return plan(request)
				.issues.filter((i) => i.level === 'stop')
				.map((i) => i.code);
		};
		expect(codes((r) => r.runs[0].channels.pop())).toContain('channel-unknown');
		expect(
			codes((r) => {
				for (const row of r.runs[0].timepoints) row.values.B = null;
			})
		).toContain('determinant-channels');
		expect(codes((r) => r.runs[0].timepoints.splice(3))).toEqual(['determinant-too-few']);
		expect(codes(() => undefined)).toEqual([]);
		const few = correlated({ criterion: 'determinant' });
		few.runs[0].timepoints.splice(3);
		expect(() => fit(few)).toThrow(FitRequestError);
	});

	it('can be stopped', () => {
		let left = 400;
		expect(() => fit(correlated({ criterion: 'determinant' }), { cancelled: () => --left < 0 })).toThrow(
			/cancelled/
		);
	});
});

describe('dependencies among responses', () => {
	const rows = Array.from({ length: 9 }, (_, k) =>
		[10.3 + 1.1 * k, 5 - 0.3 * k * k].map((v) => Number(v.toFixed(1)))
	);

	it('are found where a value was obtained by difference, to the rounding of the table', () => {
		const table = rows.map(([a, b]) => [a, b, Number((100 - a - b).toFixed(1))]);
		const { words, weights, independent } = dependenciesOf(table, ['A', 'B', 'C']);
		expect(words).toEqual(['A + B + C is the same in every row within rounding (100)']);
		expect(weights[0]).toEqual([1, 1, 1]);
		expect(independent).toHaveLength(2);
	});

	it('are said with their weights', () => {
		const table = rows.map(([a, b]) => [a, b, Number((2 * a + 7).toFixed(2))]);
		const { words } = dependenciesOf(table, ['A', 'B', 'C']);
		expect(words).toHaveLength(1);
		expect(words[0]).toMatch(/^C follows from the others within rounding: C = \d[.\d]* \+ 2 A/);
	});

	it('are not seen in scatter ten times the recording step', () => {
		const normal = normalNumbers(uniformNumbers(2));
		const table = rows.map(([a, b]) => [a, b, Number((100 - a - b + normal()).toFixed(1))]);
		expect(dependenciesOf(table, ['A', 'B', 'C']).weights).toEqual([]);
	});

	it('know the step in which a column was recorded', () => {
		expect(recordedStep([1.25, 3, 0.5])).toBe(0.01);
		expect(recordedStep([100, 20])).toBe(1);
		expect(recordedStep([2e-7, 0.5])).toBeCloseTo(1e-7, 20);
	});
});
