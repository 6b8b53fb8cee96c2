import { describe, expect, it } from 'vitest';
import { fitRequest, type FitReport } from '../../schemas/fit';
import { inPlainWords, parameterName } from '../parameter-names';
import { arrheniusCheck } from './arrhenius';
import { confirmationRun, predict } from './bands';
import { compareSchemes } from './compare';
import { fit, FitRequestError } from './fit';
import { hasLocalConstants } from './local-slots';
import { plan } from './plan';
import { leaveOneRunOut } from './refit';
import { normalNumbers, uniformNumbers } from './sequence';

const R = 8.314462618;
const TEMPERATURES = [30, 45, 60];
const constant = (kRef: number, energy: number, celsius: number) =>
	kRef * Math.exp((-energy / R) * (1 / (celsius + 273.15) - 1 / 318.15));
const times = Array.from({ length: 14 }, (_, k) => 0.25 * 1.35 ** k);

/** A → B → C at three temperatures with seeded scatter; `off` multiplies the constant of the step A → B in the second run. */
function request(options: object, off = 1, scatter = 0.002) {
	const normal = normalNumbers(uniformNumbers(5));
	const runs = TEMPERATURES.map((celsius, i) => {
		const k1 = constant(0.8, 72e3, celsius) * (i === 1 ? off : 1);
		const k2 = constant(0.15, 95e3, celsius);
		return {
			temperature: { value: celsius, unit: 'degC' },
			initial: { A: { value: 1, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: ['A', 'B'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
			timepoints: times.map((time) => {
				const a = Math.exp(-k1 * time);
				const b = (k1 / (k2 - k1)) * (a - Math.exp(-k2 * time));
				return { time, values: { A: a + scatter * normal(), B: b + scatter * normal() } };
			})
		};
	});
	const step = (id: string, from: string, to: string, k: number) => ({
		id,
		reactant: from,
		products: [{ species: to }],
		forward: { kRef: { value: k, unit: '1/h' }, activationEnergy: { fit: true } }
	});
	return fitRequest.parse({
		species: ['A', 'B', 'C'].map((id) => ({ id })),
		steps: [step('s1', 'A', 'B', 0.5), step('s2', 'B', 'C', 0.5)],
		referenceTemperature: { value: 45, unit: 'degC' },
		runs,
		options: { starts: 4, profiles: false, ...options }
	});
}
const both = ['s1.forward.kRef', 's2.forward.kRef'];
const of = (report: FitReport, id: string) => report.parameters.find((p) => p.id === id)!;

describe('constants local to a run', () => {
	const all = request({ local: both });
	const report = fit(all);

	it('are the constants of each run fitted by itself, with the scatter of all', () => {
		expect(report.fittedIds).toEqual(
			['s1', 's2'].flatMap((step) => ['r1', 'r2', 'r3'].map((run) => `${run}.${step}.forward.k`))
		);
		let ssr = 0;
		TEMPERATURES.forEach((celsius, i) => {
			const alone = fit(
				fitRequest.parse({
					...all,
					referenceTemperature: { value: celsius, unit: 'degC' },
					steps: all.steps.map((s) => ({ ...s, forward: { kRef: s.forward.kRef } })),
					runs: [all.runs[i]],
					options: { starts: 4, profiles: false }
				})
			);
			ssr += alone.weightedSsr;
			const scale = report.residualStandardError! / alone.residualStandardError!;
			for (const step of ['s1', 's2']) {
				const own = of(report, `r${i + 1}.${step}.forward.k`);
				const single = of(alone, `${step}.forward.kRef`);
				expect(own.estimate / single.estimate).toBeCloseTo(1, 8);
				expect(own.standardError! / (single.standardError! * scale)).toBeCloseTo(1, 7);
				expect(own.local).toEqual({ run: `r${i + 1}`, of: `${step}.forward.kRef` });
				expect(own.unit).toBe('1/h');
			}
		});
		expect(report.weightedSsr / ssr).toBeCloseTo(1, 10);
		// 84 values − 6 constants: the energies are no parameters any more.
		expect(report.degreesOfFreedom).toBe(78);
	});

	it('hold at the temperature of their run: near the constants that the data were made with', () => {
		TEMPERATURES.forEach((celsius, i) => {
			const { estimate, logStandardError } = of(report, `r${i + 1}.s1.forward.k`);
			expect(Math.abs(Math.log(estimate / constant(0.8, 72e3, celsius)))).toBeLessThan(4 * logStandardError!);
		});
	});

	it('may be local for one step and shared for another', () => {
		const mixed = fit(request({ local: ['s1.forward.kRef'] }));
		expect(mixed.fittedIds).toEqual([
			'r1.s1.forward.k',
			'r2.s1.forward.k',
			'r3.s1.forward.k',
			's2.forward.kRef',
			's2.forward.activationEnergy'
		]);
		expect(Math.abs(of(mixed, 's2.forward.activationEnergy').estimate - 95)).toBeLessThan(2);
	});

	it('contain the shared fit: the comparison gives a nested F test on the constants gained', () => {
		const shared = request({});
		const { nested } = compareSchemes([
			{ name: 'shared', request: shared, report: fit(shared) },
			{ name: 'local', request: all, report }
		]);
		expect(nested[0]).toMatchObject({ simpler: 'shared', fuller: 'local', df1: 2, df2: 78 });
		expect(nested[0].p).toBeGreaterThan(0.01);
	});

	it('take bounds, ties and fixing under their own ids, and a tie of two local ones run by run', () => {
		const tied = fit(
			request({
				local: both,
				tied: [{ parameter: 's2.forward.kRef', to: 's1.forward.kRef', factor: 0.2 }],
				bounds: { 'r2.s1.forward.k': { upper: { value: 0.5, unit: '1/h' } } }
			})
		);
		expect(of(tied, 'r3.s2.forward.k').state).toBe('tied');
		expect(of(tied, 'r3.s2.forward.k').estimate / of(tied, 'r3.s1.forward.k').estimate).toBeCloseTo(0.2, 12);
		expect(of(tied, 'r2.s1.forward.k').state).toBe('at bound');
		expect(of(tied, 'r2.s1.forward.k').estimate).toBeCloseTo(0.5, 12);
	});

	it('refuse what has no meaning, in words', () => {
		const codes = (options: object) =>
			plan(request(options))
				.issues.filter((i) => i.level === 'stop')
				.map((i) => i.code);
		expect(codes({ local: ['s1.forward.activationEnergy'] })).toEqual(['local-not-possible']);
		expect(codes({ local: ['s7.forward.kRef'] })).toEqual(['parameter-unknown']);
		expect(codes({ local: both, fixed: ['s1.forward.kRef'] })).toContain('local-and-fixed');
		expect(
			codes({ local: both, bounds: { 's1.forward.kRef': { upper: { value: 1, unit: '1/h' } } } })
		).toContain('local-bounds');
		expect(
			codes({ local: ['s1.forward.kRef'], tied: [{ parameter: 's2.forward.kRef', to: 's1.forward.kRef' }] })
		).toContain('tie-local');
	});

	it('say nothing of another run or temperature, and are not taken for constants that do', () => {
		expect(hasLocalConstants(report)).toBe(true);
		expect(hasLocalConstants(fit(request({})))).toBe(false);
		expect(() => confirmationRun(report, all, all.runs[0])).toThrow(/shared by all runs/);
		const warmer = { ...all.runs[0], id: 'r1', temperature: { value: 35, unit: 'degC' } };
		expect(() => predict(report, all, warmer, [1])).toThrow(/another run or temperature/);
		const own = predict(report, all, all.runs[0], [1]);
		expect(own.series.find((s) => s.id === 'A')!.curve[0]).toBeCloseTo(
			Math.exp(-of(report, 'r1.s1.forward.k').estimate),
			10
		);
	});

	it('leave one run out with the constants of the others', () => {
		const left = leaveOneRunOut(report, all);
		expect(left[1].parameters!.map((p) => p.id)).not.toContain('r2.s1.forward.k');
		// Nothing is shared: without a run the others stay where they are.
		expect(left[1].largestShift!).toBeLessThan(1e-6);
	});

	it('are told in the plan, and named by step and run', () => {
		const planned = plan(request({ local: ['s1.forward.kRef'] })).parameters;
		expect(planned.find((p) => p.id === 'r2.s1.forward.k')).toMatchObject({
			localOf: 's1.forward.kRef',
			mayBeLocal: true,
			run: 'r2'
		});
		expect(planned.find((p) => p.id === 's2.forward.kRef')?.mayBeLocal).toBe(true);
		expect(planned.find((p) => p.id === 's2.forward.activationEnergy')?.mayBeLocal).toBeUndefined();
		expect(planned.some((p) => p.id === 's1.forward.activationEnergy')).toBe(false);
		const names = { r2: 'run 2' };
		expect(parameterName('r2.s1.forward.k', all, names)).toEqual({
			letter: 'k',
			subscript: '1',
			of: 'A → B, run 2',
			kind: 'rate constant'
		});
		expect(inPlainWords('r2.s1.forward.k is open; r2.B.responseFactor too', all, names)).toBe(
			'k₁ (A → B, run 2) is open; f of B (response of B, run 2) too'
		);
	});

	it('start no search for a step that the charge of a run does not reach', () => {
		const part = request({ local: both });
		part.runs[2].initial = { B: { value: 1, unit: 'mol/L' } };
		part.runs[2].timepoints = times.map((time) => ({
			time,
			values: { A: 0.001 * (time % 0.3), B: Math.exp(-constant(0.15, 95e3, 60) * time) }
		}));
		const found = fit(part);
		expect(found.fittedIds).not.toContain('r3.s1.forward.k');
		expect(of(found, 'r3.s2.forward.k').estimate / constant(0.15, 95e3, 60)).toBeCloseTo(1, 2);
	});
});

describe('a response factor local to a run', () => {
	it('is that of each run by itself, the constant shared', () => {
		const scaled = (run: number, factor: number) => ({
			temperature: { value: 45, unit: 'degC' },
			initial: { A: { value: 1, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: [{ id: 'B', weights: { B: 1 }, unit: 'area', responseFactor: { fit: true } }],
			timepoints: times.map((time, k) => ({
				time,
				values: { B: factor * -Math.expm1(-0.4 * time) + 0.01 * Math.sin(7 * k + run) }
			}))
		});
		const data = fitRequest.parse({
			species: [{ id: 'A' }, { id: 'B' }],
			steps: [
				{
					id: 's1',
					reactant: 'A',
					products: [{ species: 'B' }],
					forward: { kRef: { value: 1, unit: '1/h' } }
				}
			],
			referenceTemperature: { value: 45, unit: 'degC' },
			runs: [scaled(1, 5), scaled(2, 8)],
			options: { starts: 4, profiles: false, local: ['B.responseFactor'] }
		});
		const report = fit(data);
		expect(report.fittedIds).toEqual(['s1.forward.kRef', 'r1.B.responseFactor', 'r2.B.responseFactor']);
		// For a given k each factor is linear: Σ y g/Σ g² with g = 1 − e^{−kt}.
		const k = of(report, 's1.forward.kRef').estimate;
		data.runs.forEach((run, i) => {
			let [yg, gg] = [0, 0];
			for (const { time, values } of run.timepoints) {
				const g = -Math.expm1(-k * time);
				yg += (values.B as number) * g;
				gg += g * g;
			}
			expect(of(report, `r${i + 1}.B.responseFactor`).estimate / (yg / gg)).toBeCloseTo(1, 9);
		});
		expect(hasLocalConstants(report)).toBe(false);
	});
});

describe('the check of the temperature dependence', () => {
	it('sets the constant of each run beside k(T) of the fit and finds nothing where the law holds', () => {
		const shared = request({});
		const report = fit(shared);
		const check = arrheniusCheck(report, shared);
		const local = fit(request({ local: both }));
		expect(check.constants.map((c) => c.of)).toEqual(both);
		check.constants[0].points.forEach((p, i) => {
			const own = of(local, `r${i + 1}.s1.forward.k`);
			expect(p.estimate / own.estimate).toBeCloseTo(1, 8);
			expect(p.logStandardError! / own.logStandardError!).toBeCloseTo(1, 7);
			const energy = of(report, 's1.forward.activationEnergy').estimate * 1000;
			const kT = constant(of(report, 's1.forward.kRef').estimate, energy, TEMPERATURES[i]);
			expect(p.shared / kT).toBeCloseTo(1, 10);
			expect(p.deviation!).toBeCloseTo(Math.log(p.estimate / kT) / p.logStandardError!, 6);
		});
		expect(check.test).toMatchObject({ df1: 2, df2: 78 });
		expect(check.findings).toEqual([]);
		const [first] = check.constants;
		expect(Math.abs(first.line!.energyKJPerMol - first.sharedEnergyKJPerMol!)).toBeLessThan(1);
	});

	it('names the run that is off its temperature', () => {
		const shared = request({}, 1.15);
		const check = arrheniusCheck(fit(shared), shared);
		expect(check.test!.p).toBeLessThan(1e-6);
		expect(check.findings.map((f) => f.code)).toEqual(['temperature-law-strained', 'run-off-the-line']);
		expect(check.findings[1].message).toContain('s1.forward.kRef in run r2');
	});

	it('has nothing to check without energies, with local constants, or with one temperature', () => {
		const local = request({ local: both });
		expect(() => arrheniusCheck(fit(local), local)).toThrow(/local to each run already/);
		const single = request({});
		single.runs = single.runs.slice(0, 1);
		single.steps = single.steps.map((s) => ({ ...s, forward: { kRef: s.forward.kRef } }));
		expect(() => arrheniusCheck(fit(single), single)).toThrow(/two temperatures or more/);
	});

	it('stops when it is called off', () => {
		const shared = request({});
		expect(() => arrheniusCheck(fit(shared), shared, { cancelled: () => true })).toThrow(/cancelled/);
	});
});

describe('bad requests', () => {
	it('do not start', () => {
		expect(() => fit(request({ local: ['s1.forward.activationEnergy'] }))).toThrow(FitRequestError);
	});
});
