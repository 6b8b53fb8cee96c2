/**
 * Indomethacin in plasma (Kwan et al. 1976; Pinheiro & Bates 2000, 6.2): subjects 2 to 6 and all six together, as two
 * compartments with loss from the first.
 *
 * Pooled: constants, sum of squares and s from c06e_indometh.json (R, there with its provenance). Subjects 2 to 6 were computed once
 * with SciPy 1.17: curves by scipy.linalg.expm of the 2 × 2 rate matrix, complex-step Jacobian, least_squares(method="lm") from thirty
 * random starts, then Gauss–Newton steps to rounding; errors of ln k and of the dose from s²(JᵀJ)⁻¹ on 7 degrees of freedom.
 */
import { describe, expect, it } from 'vitest';
import { fit } from '../../src/lib/kinetics/fit/fit';
import { fitRequest, type FitReport } from '../../src/lib/schemas/fit';
import indometh from './c06e_indometh.json';

const relative = (a: number, b: number) => Math.abs(a / b - 1);
const parameter = (report: FitReport, id: string) => report.parameters.find((p) => p.id === id)!;
const IDS = ['s1.forward.kRef', 's1.reverse.kRef', 's2.forward.kRef', 'r1.initial.P'];
const at37 = { value: 37, unit: 'degC' };
const perHour = { kRef: { value: 0.5, unit: '1/h' } };

function twoCompartments(rows: [time: number, concentration: number][]): FitReport {
	return fit(
		fitRequest.parse({
			species: [{ id: 'P' }, { id: 'T' }],
			steps: [
				{ id: 's1', reactant: 'P', products: [{ species: 'T' }], forward: perHour, reverse: perHour },
				{ id: 's2', reactant: 'P', products: [], loss: true, forward: perHour }
			],
			referenceTemperature: at37,
			runs: [
				{
					id: 'r1',
					temperature: at37,
					initial: { P: { fit: true } },
					timeUnit: 'h',
					channels: [{ id: 'P', weights: { P: 1 }, unit: 'mol/L' }],
					timepoints: rows.map(([time, P]) => ({ time, values: { P } }))
				}
			],
			options: { starts: 12, profiles: false }
		})
	);
}

/** k12, k21, k10 in 1/h and the dose; standard errors of ln k12, ln k21, ln k10 and of the dose; sum of squares. */
const SUBJECTS: [subject: keyof typeof indometh.data.subjects, values: number[], errors: number[], ssr: number][] = [
	[
		'2',
		[1.0546834435896966, 0.4998765920819629, 0.8687962349583093, 3.3265872819319986],
		[0.3712784631430962, 0.8492865808081378, 0.3775927172345116, 0.53697953646828],
		0.14416186430883335
	],
	[
		'3',
		[2.5069304324560555, 1.8564209523873438, 2.0522701097965315, 7.144078921029803],
		[0.352080199930495, 0.1761050199594628, 0.22331583505957583, 1.7495442162763573],
		0.02872565295363357
	],
	[
		'4',
		[0.3423456132744355, 0.31268213566562847, 0.8205120309009937, 2.4526529129922796],
		[0.30022430065152295, 0.8645404430304845, 0.16286544947024248, 0.09976414870524444],
		0.01439263046500022
	],
	[
		'5',
		[1.136007152257564, 0.4188110012948668, 1.4981696072853756, 3.857597867072476],
		[0.23786940676691515, 0.5663809765988871, 0.2074234902358494, 0.356772566701192],
		0.03230292515610305
	],
	[
		'6',
		[1.154328551386429, 1.039943418969606, 1.1923356766517264, 3.9707762703568243],
		[0.14829521813490837, 0.1682137557733933, 0.06506416251096334, 0.2158785683857199],
		0.008363899765807054
	]
];

describe.each(SUBJECTS)('indomethacin, subject %s', (subject, values, errors, ssr) => {
	const { time, conc } = indometh.data.subjects[subject];
	const report = twoCompartments(time.map((t, i) => [t, conc[i]]));

	it('reaches the independent constants, dose, errors and sum of squares', () => {
		expect(report.status).toBe('converged');
		expect(relative(report.weightedSsr, ssr)).toBeLessThan(1e-10);
		expect(report.degreesOfFreedom).toBe(7);
		IDS.forEach((id, i) => {
			const found = parameter(report, id);
			expect(relative(found.estimate, values[i]), id).toBeLessThan(1e-7);
			expect(relative(found.logStandardError ?? found.standardError!, errors[i]), id).toBeLessThan(1e-6);
		});
	});

	it('is found with the dose eliminated', () => expect(report.eliminated).toEqual(['r1.initial.P']));
});

describe('indomethacin, six subjects pooled', () => {
	it('reaches the constants that the published biexponential stands for', () => {
		const rows = Object.values(indometh.data.subjects).flatMap(({ time, conc }) =>
			time.map((t, i): [number, number] => [t, conc[i]])
		);
		const report = twoCompartments(rows);
		const { two_compartment: two, rss, sigma, dof } = indometh.expected.pooled;
		[two.k12, two.k21, two.k10, two.c0].forEach((value, i) =>
			expect(relative(parameter(report, IDS[i]).estimate, value)).toBeLessThan(1e-4)
		);
		expect(relative(report.weightedSsr, rss.value)).toBeLessThan(1e-9);
		expect(relative(report.residualStandardError!, sigma)).toBeLessThan(1e-9);
		expect(report.degreesOfFreedom).toBe(dof);
		// Six subjects at equal times are separate samples: 11 times, so 55 of pure error.
		expect(report.lackOfFit).toMatchObject({ df1: 7, df2: 55 });
	});
});
