/**
 * Options of a fit, each through `fit` on seeded simulated data, held to an independent computation.
 *
 * The numbers of fit-options.json were computed once with SciPy 1.17: for every case a model written out by hand (rate laws,
 * scipy.linalg.expm of the rate matrix at every time), residuals divided by the error model's σ, least_squares with complex-step
 * Jacobians, polished by Gauss–Newton steps until the gradient was rounding; standard errors from s²(JᵀJ)⁻¹ with
 * s² = SSR/(values − parameters). A limit gave a residual only where the curve lay beyond it. The data are made with scatter
 * from a fixed seed (or, for N2O5, from the tabulated constants of c03a_n2o5_six_temperatures.json without scatter). Figures that carry
 * a unit are in the unit that the request uses.
 */
import { describe, expect, it } from 'vitest';
import { fit } from '../../src/lib/kinetics/fit/fit';
import { fitRequest } from '../../src/lib/schemas/fit';
import reference from './fit-options.json';
import n2o5 from './c03a_n2o5_six_temperatures.json';

interface Expected {
	parameters: Record<string, [number, number | null]>;
	ssr: number;
	degreesOfFreedom: number;
	censored?: number;
	activeLimits?: number;
	sigma?: Record<string, number>;
	units?: Record<string, string>;
	states?: Record<string, string>;
}
interface Case {
	name: string;
	request: unknown;
	expected: Expected;
}

const cases = reference.cases as unknown as Case[];
const relative = (a: number, b: number) => Math.abs(a / b - 1);
const fitted = ({ request }: Case) => fit(fitRequest.parse(request));
const named = (part: string) => {
	const found = cases.find((c) => c.name.includes(part));
	if (!found) throw new Error(`no case is called ${part}`);
	return found;
};

describe.each(cases)('$name', (entry) => {
	const { expected } = entry;
	const report = fitted(entry);

	it('reaches the independent estimates, standard errors and sum of squares', () => {
		expect(report.status).toBe('converged');
		expect(report.parameters.map((p) => p.id).sort()).toEqual(Object.keys(expected.parameters).sort());
		for (const { id, estimate, standardError } of report.parameters) {
			const [value, error] = expected.parameters[id];
			expect(relative(estimate, value), `${id}: ${estimate} for ${value}`).toBeLessThan(1e-9);
			if (error === null) expect(standardError).toBeNull();
			else expect(relative(standardError!, error), `error of ${id}`).toBeLessThan(1e-7);
		}
		expect(relative(report.weightedSsr, expected.ssr)).toBeLessThan(1e-9);
		expect(report.degreesOfFreedom).toBe(expected.degreesOfFreedom);
		expect(report.residualStandardError! ** 2 * expected.degreesOfFreedom).toBeCloseTo(report.weightedSsr, 12);
	});

	it('states units, limits and states as asked', () => {
		expect(report.pointsCensored).toBe(expected.censored ?? 0);
		for (const p of report.parameters) {
			expect(p.state).toBe(expected.states?.[p.id] ?? 'fitted');
			if (expected.units?.[p.id]) expect(p.unit).toBe(expected.units[p.id]);
		}
	});
});

describe('error models', () => {
	it('store the standard deviation of every value with the result', () => {
		const entry = named('weights from replicates');
		for (const r of fitted(entry).residuals)
			expect(relative(r.sigma, entry.expected.sigma![r.channel])).toBeLessThan(1e-12);
	});

	it('leave s near one where the stated error is the true one', () => {
		// 42 degrees of freedom: s lies between 0.7 and 1.3 in 99 of 100 cases.
		const s = fitted(named('weights from replicates')).residualStandardError!;
		expect(s).toBeGreaterThan(0.7);
		expect(s).toBeLessThan(1.3);
	});
});

describe('limits', () => {
	const entry = named('limits below and above');
	const report = fitted(entry);

	it('add to the misfit only where the curve lies beyond them', () => {
		const values = report.residuals.reduce((sum, r) => sum + ((r.residual ?? 0) / r.sigma) ** 2, 0);
		const beyond = report.residuals.filter(
			(r) =>
				(r.below !== undefined && r.predicted > r.below) || (r.above !== undefined && r.predicted < r.above)
		);
		expect(beyond).toHaveLength(entry.expected.activeLimits!);
		const limits = beyond.reduce((sum, r) => sum + (r.predicted - (r.below ?? r.above)!) ** 2, 0);
		expect(relative(values + limits, report.weightedSsr)).toBeLessThan(1e-12);
	});

	it('are not counted as values', () => {
		expect(report.pointsUsed + report.pointsCensored).toBe(24);
		expect(report.residuals.filter((r) => r.observed === null)).toHaveLength(report.pointsCensored);
	});
});

describe('temperatures in one stage', () => {
	it('agree with the energy of the tabulated constants of N2O5 within its two-stage error', () => {
		const energy = fitted(named('N2O5')).parameters.find((p) => p.id.endsWith('activationEnergy'))!;
		const { Ea_kJ_mol, se_Ea } = n2o5.expected.fit.arrhenius;
		expect(Math.abs(energy.estimate - Ea_kJ_mol)).toBeLessThan(se_Ea);
	});

	it('give 76.3 ± 0.4 kJ/mol and nearly no correlation at the central reference temperature', () => {
		const report = fitted(named('four temperatures'));
		expect(Math.abs(report.parameters[1].estimate - 76.3)).toBeLessThan(0.4);
		expect(Math.abs(report.correlation[0][1])).toBeLessThan(0.1);
	});
});

describe('a time offset', () => {
	it('is the same in minutes, seconds and hours', () => {
		const minutes = named('time offset in minutes');
		const json = structuredClone(minutes.request) as {
			runs: { timeUnit: string; timepoints: { time: number }[] }[];
		};
		json.runs[0].timeUnit = 'h';
		for (const row of json.runs[0].timepoints) row.time /= 60;
		const [a, b] = [fitted(minutes), fit(fitRequest.parse(json))];
		const offset = (of: typeof a) => of.parameters.find((p) => p.id === 'r1.timeOffset')!;
		expect(offset(b).unit).toBe('h');
		expect(relative(offset(b).estimate * 60, offset(a).estimate)).toBeLessThan(1e-8);
		expect(relative(offset(b).standardError! * 60, offset(a).standardError!)).toBeLessThan(1e-8);
		expect(relative(b.weightedSsr, a.weightedSsr)).toBeLessThan(1e-10);
	});
});
