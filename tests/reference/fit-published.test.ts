/** Published data sets through the whole fit: estimates, sums of squares and standard errors. */
import { describe, expect, it } from 'vitest';
import { fit } from '../../src/lib/kinetics/fit/fit';
import { temperatureLine } from '../../src/lib/kinetics/fit/straight-line';
import { fitRequest, type FitReport, type FitRequest } from '../../src/lib/schemas/fit';
import pinene from './c01_alpha_pinene_189C.json';
import n2o5 from './c03a_n2o5_six_temperatures.json';
import n2o5Ncert from './c03c_n2o5_ncert.json';
import teaching from './c03e_arrhenius_teaching.json';
import tetracycline from './c06a_tetracycline.json';
import bod from './c06c_bod_profile.json';
import indometh from './c06e_indometh.json';
import theoph from './c06g_theoph.json';
import chain from './c06h_irreversible_chain.json';

type Json = Record<string, unknown>;
const request = (json: Json): FitRequest => fitRequest.parse(json);
const parameter = (report: FitReport, id: string) => report.parameters.find((p) => p.id === id)!;
const relative = (a: number, b: number) => Math.abs(a / b - 1);

const species = (...ids: string[]) => ids.map((id) => ({ id }));
const law = (value: number, unit: string) => ({ kRef: { value, unit } });
const step = (id: string, reactant: string, product: string | null, value: number, unit: string) => ({
	id,
	reactant,
	products: product ? [{ species: product, coefficient: 1 }] : [],
	forward: law(value, unit),
	reverse: null
});

describe('alpha-pinene at 189.5 °C (Fuguitt & Hawkins 1947; Box et al. 1973)', () => {
	const names = pinene.data.species.map((_, i) => 'ABCDE'[i]);
	const data = request({
		species: species(...names),
		steps: pinene.data.arrows.map(([from, to], i) =>
			step(
				`s${i + 1}`,
				names[pinene.data.species.indexOf(from)],
				names[pinene.data.species.indexOf(to)],
				1e-5,
				'1/min'
			)
		),
		referenceTemperature: { value: 189.5, unit: 'degC' },
		runs: [
			{
				id: 'r1',
				temperature: { value: 189.5, unit: 'degC' },
				initial: { A: { value: 100, unit: '%' } },
				timeUnit: 'min',
				channels: names.map((id) => ({ id, weights: { [id]: 1 }, unit: '%' })),
				timepoints: pinene.data.times.map((time, i) => ({
					time,
					values: Object.fromEntries(names.map((id, j) => [id, pinene.data.observations[i][j]]))
				}))
			}
		]
	});

	it('reaches the published constants, sum of squares and standard errors', () => {
		const report = fit(data);
		expect(report.status).toBe('converged');
		expect(relative(report.weightedSsr, pinene.expected.rss.value)).toBeLessThan(1e-10);
		expect(report.degreesOfFreedom).toBe(35);
		pinene.expected.k.value.forEach((k, i) => {
			const found = parameter(report, `s${i + 1}.forward.kRef`);
			expect(relative(found.estimate, k)).toBeLessThan(1e-6);
			expect(relative(found.standardError!, pinene.expected.se_k.value[i])).toBeLessThan(1e-5);
			expect(relative(found.logStandardError!, pinene.expected.se_ln_k.value[i])).toBeLessThan(1e-5);
		});
		pinene.expected.correlation_ln_k.value.forEach((row, i) =>
			row.forEach((rho, j) => expect(report.correlation[i][j]).toBeCloseTo(rho, 6))
		);
	});
});

const run = (over: Json) => ({
	id: 'r1',
	temperature: { value: 25, unit: 'degC' },
	timeUnit: 'h',
	...over
});
const seen = (id: string, species: string, unit: string, over: Json = {}) => ({
	id,
	weights: { [species]: 1 },
	unit,
	...over
});
const fitted = (value: number, unit: string) => ({ fit: true, guess: { value, unit } });
const at25 = { value: 25, unit: 'degC' };

describe('A → B → C with A and B observed (Tjoa & Biegler 1991)', () => {
	it('reaches the published optimum and errors', () => {
		const report = fit(
			request({
				species: species('A', 'B', 'C'),
				steps: [step('s1', 'A', 'B', 1, '1/h'), step('s2', 'B', 'C', 1, '1/h')],
				referenceTemperature: at25,
				runs: [
					run({
						initial: { A: { value: 1, unit: 'mol/L' } },
						channels: [seen('A', 'A', 'mol/L'), seen('B', 'B', 'mol/L')],
						timepoints: chain.data.times.map((time, i) => ({
							time,
							values: { A: chain.data.observations[i][0], B: chain.data.observations[i][1] }
						}))
					})
				]
			})
		);
		chain.expected.k.value.forEach((k, i) => {
			const found = parameter(report, `s${i + 1}.forward.kRef`);
			expect(relative(found.estimate, k)).toBeLessThan(1e-9);
			expect(relative(found.standardError!, chain.expected.se.value[i])).toBeLessThan(1e-6);
		});
		expect(relative(report.weightedSsr, chain.expected.rss.value)).toBeLessThan(1e-9);
	});
});

describe('biochemical oxygen demand (Marske 1967; Bates & Watts 1988, 2.3 and 6)', () => {
	const report = fit(
		request({
			species: species('A', 'B'),
			steps: [step('s1', 'A', 'B', 1, '1/d')],
			referenceTemperature: at25,
			runs: [
				run({
					timeUnit: 'd',
					initial: { A: fitted(20, 'mol/L') },
					channels: [seen('B', 'B', 'mol/L')],
					timepoints: bod.data.t.map((time, i) => ({ time, values: { B: bod.data.y[i] } }))
				})
			]
		})
	);
	const k = parameter(report, 's1.forward.kRef');
	const demand = parameter(report, 'r1.initial.A');

	it('reaches the estimates, errors and linear intervals of R', () => {
		expect(relative(demand.estimate, bod.expected.A.value)).toBeLessThan(1e-9);
		expect(relative(k.estimate, bod.expected.k.value)).toBeLessThan(1e-9);
		expect(relative(report.weightedSsr, bod.expected.rss.value)).toBeLessThan(1e-11);
		expect(relative(demand.standardError!, bod.expected.se.value[0])).toBeLessThan(1e-6);
		expect(relative(k.standardError!, bod.expected.se.value[1])).toBeLessThan(1e-6);
		expect(report.correlation[0][1]).toBeCloseTo(bod.expected.correlation.value, 6);
		bod.expected.wald_95.value[1].forEach((end, i) => expect(k.ci95![i]).toBeCloseTo(end, 5));
		bod.expected.wald_95.value[0].forEach((end, i) => expect(demand.ci95![i]).toBeCloseTo(end, 4));
	});

	it('finds the profile limits by re-optimisation, and re-optimised misfit equals the threshold there', () => {
		// Exact root, 0.1314: c06c_bod_profile.json names interpolated limits of R as 0.13562 and 14.0845.
		expect(k.profileCi95![0]).toBeCloseTo(0.1314, 4);
		expect(k.profileCi95![0]!).toBeLessThan(0.1357);
		expect(demand.profileCi95![0]!).toBeLessThan(14.0845);
		// For a given k the best A is linear: Σ y f/Σ f², so the profile can be checked without the engine.
		const misfit = (rate: number) => {
			const f = bod.data.t.map((t) => -Math.expm1(-rate * t));
			const a = f.reduce((sum, v, i) => sum + v * bod.data.y[i], 0) / f.reduce((sum, v) => sum + v * v, 0);
			return f.reduce((sum, v, i) => sum + (bod.data.y[i] - a * v) ** 2, 0);
		};
		const threshold = report.weightedSsr * (1 + 2.7764451051977987 ** 2 / 4);
		expect(relative(misfit(k.profileCi95![0]!), threshold)).toBeLessThan(1e-7);
		if (k.profileCi95![1] !== null) expect(relative(misfit(k.profileCi95![1]), threshold)).toBeLessThan(1e-7);
		else expect(misfit(1e3)).toBeLessThan(threshold);
	});
});

describe('tetracycline in serum (Bates & Watts 1988, 5)', () => {
	it('finds the published constants and unseen dose, with the errors of their logarithms', () => {
		const report = fit(
			request({
				species: species('A', 'B'),
				steps: [step('s1', 'A', 'B', 0.3, '1/h'), step('s2', 'B', null, 0.3, '1/h')],
				referenceTemperature: at25,
				options: { bounds: { 's1.forward.kRef': { upper: { value: 0.3, unit: '1/h' } } } },
				runs: [
					run({
						initial: { A: { fit: true } },
						channels: [seen('B', 'B', 'mol/L')],
						timepoints: tetracycline.data.times.map((time, i) => ({
							time,
							values: { B: tetracycline.data.observations_B[i] }
						}))
					})
				]
			})
		);
		const expected = tetracycline.expected.no_dead_time;
		const ids = ['s1.forward.kRef', 's2.forward.kRef', 'r1.initial.A'];
		ids.forEach((id, i) => {
			const found = parameter(report, id);
			expect(relative(found.estimate, expected.theta.value[i])).toBeLessThan(1e-7);
			expect(relative(found.standardError! / found.estimate, expected.se_ln_theta.value[i])).toBeLessThan(1e-5);
		});
		expect(relative(report.weightedSsr, expected.rss.value)).toBeLessThan(1e-9);
		expected.correlation.value.forEach((row, i) =>
			row.forEach((rho, j) => expect(report.correlation[i][j]).toBeCloseTo(rho, 5))
		);
	});
});

describe('theophylline, subject 11 (Boeckmann, Sheiner & Beal 1994)', () => {
	it('finds absorption and elimination with their errors', () => {
		const { time, conc, dose } = theoph.data.subjects['11'];
		const expected = theoph.expected.subjects['11'];
		const [lKe, lKa, lCl] = expected.lKe_lKa_lCl.value;
		// The dose D gives an unseen charge D·Ke/Cl in mg/L: fitted here, with ln(charge) = ln D + lKe − lCl.
		const report = fit(
			request({
				species: species('A', 'B'),
				steps: [step('s1', 'A', 'B', 2, '1/h'), step('s2', 'B', null, 0.1, '1/h')],
				referenceTemperature: at25,
				options: { useTimeZeroRow: true, bounds: { 's2.forward.kRef': { upper: { value: 0.5, unit: '1/h' } } } },
				runs: [
					run({
						initial: { A: fitted(8, 'mol/L') },
						channels: [seen('B', 'B', 'mol/L')],
						timepoints: time.map((t, i) => ({ time: t, values: { B: conc[i] } }))
					})
				]
			})
		);
		const ka = parameter(report, 's1.forward.kRef');
		const ke = parameter(report, 's2.forward.kRef');
		expect(relative(ka.estimate, Math.exp(lKa))).toBeLessThan(1e-7);
		expect(relative(ke.estimate, Math.exp(lKe))).toBeLessThan(1e-7);
		expect(relative(parameter(report, 'r1.initial.A').estimate, dose * Math.exp(lKe - lCl))).toBeLessThan(1e-7);
		expect(relative(ke.logStandardError!, expected.se.value[0])).toBeLessThan(1e-5);
		expect(relative(ka.logStandardError!, expected.se.value[1])).toBeLessThan(1e-5);
		expect(relative(report.weightedSsr, expected.rss.value)).toBeLessThan(1e-9);
		expect(report.degreesOfFreedom).toBe(expected.dof);
	});
});

describe('indomethacin, subject 1: two compartments (Kwan et al. 1976)', () => {
	it('gives the constants that the published biexponential stands for', () => {
		const { time, conc } = indometh.data.subjects['1'];
		const expected = indometh.expected.per_subject['1'];
		const two = expected.two_compartment;
		const report = fit(
			request({
				species: species('P', 'T'),
				steps: [
					{ ...step('s1', 'P', 'T', 0.5, '1/h'), reverse: law(0.5, '1/h') },
					step('s2', 'P', null, 0.5, '1/h')
				],
				referenceTemperature: at25,
				runs: [
					run({
						initial: { P: fitted(2, 'mol/L') },
						channels: [seen('P', 'P', 'mol/L')],
						timepoints: time.map((t, i) => ({ time: t, values: { P: conc[i] } }))
					})
				]
			})
		);
		expect(relative(parameter(report, 's1.forward.kRef').estimate, two.k12)).toBeLessThan(1e-4);
		expect(relative(parameter(report, 's1.reverse.kRef').estimate, two.k21)).toBeLessThan(1e-4);
		expect(relative(parameter(report, 's2.forward.kRef').estimate, two.k10)).toBeLessThan(1e-4);
		expect(relative(parameter(report, 'r1.initial.P').estimate, two.c0)).toBeLessThan(1e-4);
		expect(relative(report.weightedSsr, expected.rss.value)).toBeLessThan(1e-9);
		expect(relative(report.residualStandardError!, expected.sigma)).toBeLessThan(1e-9);
	});
});

describe.each([
	['Daniels & Johnston 1921, six temperatures', n2o5],
	['school exercise, five temperatures', n2o5Ncert],
	['teaching data, five temperatures', teaching]
])('Arrhenius and Eyring lines: %s', (_, set) => {
	it('gives energy, entropy and errors of the closed form', () => {
		const { arrhenius, eyring } = set.expected.fit;
		const line = temperatureLine(set.data.T, set.data.k);
		expect(relative(line.energyJPerMol / 1000, arrhenius.Ea_kJ_mol)).toBeLessThan(1e-9);
		expect(relative(line.energyError / 1000, arrhenius.se_Ea)).toBeLessThan(1e-9);
		expect(relative(Math.exp(line.entropyOrLnA), arrhenius.A)).toBeLessThan(1e-8);
		expect(relative(line.entropyOrLnAError, arrhenius.se_lnA)).toBeLessThan(1e-9);
		const other = temperatureLine(set.data.T, set.data.k, 'eyring');
		expect(relative(other.energyJPerMol / 1000, eyring.dH_kJ_mol)).toBeLessThan(1e-9);
		expect(relative(other.energyError / 1000, eyring.se_dH)).toBeLessThan(1e-9);
		expect(relative(other.entropyOrLnA, eyring.dS_J_mol_K)).toBeLessThan(1e-7);
	});

	it('agrees with the one-stage fit to decay curves made with these constants', () => {
		// Noise-free curves at each temperature, weighted alike on ln: one stage must return the scatter-free line through two of them.
		const [i, j] = [0, set.data.T.length - 1];
		const runs = [i, j].map((q) =>
			run({
				id: `r${q}`,
				timeUnit: 's',
				temperature: { value: set.data.T[q], unit: 'K' },
				initial: { A: { value: 1, unit: 'mol/L' } },
				channels: [seen('A', 'A', 'mol/L')],
				timepoints: [0.2, 0.5, 1, 2, 3].map((u) => ({ time: u / set.data.k[q], values: { A: Math.exp(-u) } }))
			})
		);
		const report = fit(
			request({
				species: species('A', 'B'),
				steps: [
					{
						...step('s1', 'A', 'B', set.data.k[2], '1/s'),
						forward: { kRef: { value: set.data.k[2], unit: '1/s' }, activationEnergy: { fit: true } }
					}
				],
				referenceTemperature: { value: set.data.T[2], unit: 'K' },
				runs
			})
		);
		const slope = Math.log(set.data.k[j] / set.data.k[i]) / (1 / set.data.T[i] - 1 / set.data.T[j]);
		const energy = parameter(report, 's1.forward.activationEnergy');
		expect(relative(energy.estimate, (8.31446261815324 * slope) / 1000)).toBeLessThan(1e-9);
	});
});
