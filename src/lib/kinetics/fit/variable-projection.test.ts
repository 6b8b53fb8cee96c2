import { describe, expect, it } from 'vitest';
import pinene from '../../../../tests/reference/c01_alpha_pinene_189C.json';
import tetracycline from '../../../../tests/reference/c06a_tetracycline.json';
import { fitRequest, type FitRequest } from '../../schemas/fit';
import { eliminationOf } from './elimination';
import { fit } from './fit';
import { KineticModel } from './model';
import { plan } from './plan';
import { compileProblem } from './problem';
import { normalNumbers, uniformNumbers } from './sequence';
import { searchBox } from './starts';
import { ProjectedModel } from './variable-projection';

const step = (pair: string, i: number, k: number, unit: string) => ({
	id: `s${i + 1}`,
	reactant: pair[0],
	products: pair[1] ? [{ species: pair[1] }] : [],
	loss: !pair[1],
	forward: { kRef: { value: k, unit } }
});
const at25 = { value: 25, unit: 'degC' };

/** Alpha-pinene (Fuguitt & Hawkins 1947) with the charge unknown. */
const unknownCharge = (options: object = {}) =>
	fitRequest.parse({
		species: [...'ABCDE'].map((id) => ({ id })),
		steps: ['AB', 'AC', 'CD', 'CE', 'EC'].map((pair, i) => step(pair, i, 1e-5, '1/min')),
		referenceTemperature: at25,
		runs: [
			{
				temperature: at25,
				initial: { A: { fit: true } },
				timeUnit: 'min',
				channels: [...'ABCDE'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
				timepoints: pinene.data.times.map((time, i) => ({
					time,
					values: Object.fromEntries([...'ABCDE'].map((id, j) => [id, pinene.data.observations[i][j]]))
				}))
			}
		],
		options: { starts: 6, ...options }
	});

/** A → B → C → D; B, C and D seen in areas of unknown size, 2 % scatter. */
function areas(options: object = {}, k = [0.5, 0.5, 0.5]): FitRequest {
	const normal = normalNumbers(uniformNumbers(4));
	const [a, b, c] = [1.2, 0.4, 0.1];
	return fitRequest.parse({
		species: [...'ABCD'].map((id) => ({ id })),
		steps: ['AB', 'BC', 'CD'].map((pair, i) => step(pair, i, k[i], '1/h')),
		referenceTemperature: at25,
		runs: [
			{
				temperature: at25,
				initial: { A: { value: 1, unit: 'mol/L' } },
				timeUnit: 'h',
				channels: [...'BCD'].map((id) => ({
					id,
					weights: { [id]: 1 },
					unit: 'area',
					responseFactor: { fit: true }
				})),
				timepoints: Array.from({ length: 15 }, (_, i) => {
					const time = 0.3 * 1.3 ** i;
					const e = (x: number) => Math.exp(-x * time);
					const B = (a / (b - a)) * (e(a) - e(b));
					const C =
						a * b * (e(a) / ((b - a) * (c - a)) + e(b) / ((a - b) * (c - b)) + e(c) / ((a - c) * (b - c)));
					const area = (factor: number, amount: number) => factor * amount * (1 + 0.02 * normal());
					return { time, values: { B: area(200, B), C: area(900, C), D: area(50, 1 - e(a) - B - C) } };
				})
			}
		],
		options: { starts: 6, ...options }
	});
}

const onlyFastFirst = (options: object = {}) =>
	areas({ bounds: { 's1.forward.kRef': { lower: { value: 0.8, unit: '1/h' } } }, ...options });

/** Two unknown charges in one run, two runs with a shared constant, weights that differ. */
function twoCharges(options: object = {}): FitRequest {
	const normal = normalNumbers(uniformNumbers(6));
	const run = (a: number, b: number) => ({
		temperature: at25,
		initial: { A: { fit: true }, B: { fit: true } },
		timeUnit: 'h',
		channels: [...'AB'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
		timepoints: Array.from({ length: 10 }, (_, i) => {
			const time = 0.4 * (i + 1);
			const A = a * Math.exp(-0.7 * time);
			const B =
				b * Math.exp(-0.2 * time) +
				((a * 0.7) / (0.2 - 0.7)) * (Math.exp(-0.7 * time) - Math.exp(-0.2 * time));
			return { time, values: { A: A + 0.005 * normal(), B: B + 0.005 * normal() } };
		})
	});
	return fitRequest.parse({
		species: [...'ABC'].map((id) => ({ id })),
		steps: ['AB', 'BC'].map((pair, i) => step(pair, i, 0.1, '1/h')),
		referenceTemperature: at25,
		runs: [run(1, 0.2), run(0.4, 0.6)],
		options: { starts: 6, weighting: { model: 'combined', a: 0.004, b: 0.01 }, ...options }
	});
}

const off = { variableProjection: false };

describe.each([
	['alpha-pinene with an unknown charge', unknownCharge, ['r1.initial.A']],
	// The bound keeps to one of the two solutions that describe such data equally well.
	['three response factors', onlyFastFirst, ['B.responseFactor', 'C.responseFactor', 'D.responseFactor']],
	[
		'two charges in each of two runs',
		twoCharges,
		['r1.initial.A', 'r1.initial.B', 'r2.initial.A', 'r2.initial.B']
	]
])('%s', (_name, made, linear) => {
	const eliminated = fit(made());
	const full = fit(made(off));

	it('is told to be eliminated, in the report and in the plan', () => {
		expect(eliminated.eliminated).toEqual(linear);
		expect(plan(made()).eliminated).toEqual(linear);
		expect(full.eliminated).toEqual([]);
		expect(full.eliminationNote).toMatch(/switched off/);
	});

	it('gives the optimum, errors, correlations and profile limits of the full problem', () => {
		const close = (a: number | null, b: number | null, what: string) => {
			if (b === null || b === 0) expect(a, what).toBe(b);
			else expect(Math.abs(a! / b - 1), what).toBeLessThan(1e-9);
		};
		close(eliminated.weightedSsr, full.weightedSsr, 'SSR');
		eliminated.parameters.forEach((p, i) => {
			const other = full.parameters[i];
			close(p.estimate, other.estimate, p.id);
			close(p.standardError, other.standardError, `error of ${p.id}`);
			p.profileCi95!.forEach((end, k) => close(end, other.profileCi95![k], `profile of ${p.id}`));
			eliminated.correlation[i].forEach((rho, j) =>
				expect(Math.abs(rho - full.correlation[i][j])).toBeLessThan(1e-9)
			);
		});
		expect(eliminated.singularValues).toHaveLength(full.singularValues.length);
	});

	it('keeps the gradient: twice the projected Jacobian times the residuals is the slope of the projected sum of squares', () => {
		const { problem } = compileProblem(made());
		const model = new KineticModel(problem!);
		const box = searchBox(problem!);
		const projected = new ProjectedModel(model, eliminationOf(problem!, box).linear);
		const theta = projected.begin(box.guess);
		const residuals = new Float64Array(projected.m);
		const jacobian = new Float64Array(projected.m * projected.p);
		const ssr = (at: Float64Array) => {
			expect(projected.evaluate(at, residuals, jacobian)).toBe(true);
			return residuals.reduce((sum, r) => sum + r * r, 0);
		};
		ssr(theta);
		const slope = Array.from({ length: projected.p }, (_, j) =>
			residuals.reduce((sum, r, i) => sum + 2 * r * jacobian[j * projected.m + i], 0)
		);
		slope.forEach((value, j) => {
			const moved = (h: number) => ssr(Float64Array.from(theta, (v, k) => v + (k === j ? h : 0)));
			const h = 1e-5;
			const found = (moved(h) - moved(-h)) / (2 * h);
			expect(Math.abs(found - value)).toBeLessThan(1e-6 * Math.max(...slope.map(Math.abs)));
		});
	});
});

describe('poor starts', () => {
	it('converge that the full problem loses, in a tenth of the evaluations', () => {
		const best = fit(areas({ starts: 30, profiles: false })).weightedSsr;
		const tally = { eliminated: 0, full: 0, evaluations: 0, inFull: 0 };
		const decades = [0.001, 0.03, 1, 30];
		// Every third of the 64 starts on a grid over four and a half decades.
		const grid = decades.flatMap((a) => decades.flatMap((b) => decades.map((c) => [a, b, c])));
		for (const k of grid.filter((_, i) => i % 3 === 0)) {
			const one = fit(areas({ starts: 1, profiles: false }, k));
			const other = fit(areas({ starts: 1, profiles: false, ...off }, k));
			tally.eliminated += one.weightedSsr < best * 1.000001 ? 1 : 0;
			tally.full += other.weightedSsr < best * 1.000001 ? 1 : 0;
			tally.evaluations += one.evaluations;
			tally.inFull += other.evaluations;
		}
		expect(tally.eliminated).toBe(22);
		expect(tally.full).toBeLessThan(22);
		expect(tally.evaluations).toBeLessThan(0.2 * tally.inFull);
	});
});

describe('what is not eliminated', () => {
	const linearOf = (request: FitRequest) => {
		const { problem } = compileProblem(request);
		const { linear, note } = eliminationOf(problem!, searchBox(problem!));
		return { ids: linear.map((j) => problem!.free[j].id), note };
	};

	it('is everything where a limit counts', () => {
		const request = areas();
		request.runs[0].timepoints[0].values.D = { below: 1 };
		expect(linearOf(request)).toEqual({
			ids: [],
			note: expect.stringContaining('1 value is a limit') as string
		});
		expect(fit({ ...request, options: { ...request.options, profiles: false } }).eliminated).toEqual([]);
	});

	it('is a charge that an eliminated response factor multiplies', () => {
		const request = areas();
		request.runs[0].initial = { A: { fit: true, guess: { value: 1, unit: 'mol/L' } } };
		request.runs[0].channels[0] = { id: 'B', weights: { B: 1 }, unit: 'mol/L' };
		const { ids, note } = linearOf(request);
		expect(ids).toEqual(['C.responseFactor', 'D.responseFactor']);
		expect(note).toContain('r1.initial.A was searched for');
	});

	it('is anything that area % depends on', () => {
		const request = areas();
		request.runs[0].channels = request.runs[0].channels.map((c) => ({ ...c, unit: 'area %' }));
		expect(linearOf(request).ids).toEqual([]);
	});

	it('is a parameter at its bound: the search goes on with all parameters and says so', () => {
		const bounded = (more: object) =>
			fit(
				unknownCharge({
					starts: 3,
					profiles: false,
					bounds: { 'r1.initial.A': { upper: { value: 99, unit: 'mol/L' } } },
					...more
				})
			);
		const report = bounded({});
		const full = bounded(off);
		expect(report.parameters.find((p) => p.id === 'r1.initial.A')).toMatchObject({ state: 'at bound' });
		expect(report.weightedSsr / full.weightedSsr).toBeCloseTo(1, 10);
		expect(report.eliminated).toEqual([]);
		expect(report.eliminationNote).toMatch(/3 of 3 starts were searched with all parameters/);
	});

	it('is a tied charge by itself: with its leader it is eliminated as one', () => {
		const request = twoCharges({
			tied: [{ parameter: 'r1.initial.B', to: 'r1.initial.A', factor: 0.2 }],
			fixed: []
		});
		expect(linearOf(request).ids).toEqual(['r1.initial.A', 'r2.initial.A', 'r2.initial.B']);
		const [one, other] = [{}, off].map((o) =>
			fit({ ...request, options: { ...request.options, profiles: false, ...o } })
		);
		expect(one.weightedSsr / other.weightedSsr).toBeCloseTo(1, 11);
	});
});

describe('tetracycline in serum (Bates & Watts 1988, 5)', () => {
	it('shows both solutions, the dose eliminated', () => {
		const report = fit(
			fitRequest.parse({
				species: [{ id: 'A' }, { id: 'B' }],
				steps: [step('AB', 0, 0.3, '1/h'), step('B', 1, 0.3, '1/h')],
				referenceTemperature: at25,
				runs: [
					{
						temperature: at25,
						initial: { A: { fit: true } },
						timeUnit: 'h',
						channels: [{ id: 'B', weights: { B: 1 }, unit: 'mol/L' }],
						timepoints: tetracycline.data.times.map((time, i) => ({
							time,
							values: { B: tetracycline.data.observations_B[i] }
						}))
					}
				],
				options: { starts: 20, profiles: false }
			})
		);
		expect(report.eliminated).toEqual(['r1.initial.A']);
		expect(report.weightedSsr / tetracycline.expected.no_dead_time.rss.value).toBeCloseTo(1, 9);
		expect(report.findings.map((f) => f.code)).toContain('ambiguous-solutions');
	});
});
