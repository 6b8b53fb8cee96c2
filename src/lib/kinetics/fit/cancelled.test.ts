import { describe, expect, it } from 'vitest';
import { fitRequest } from '../../schemas/fit';
import { FitCancelled, watchOver } from './cancelled';
import { fit, type FitHooks, type FitProgress } from './fit';
import { jointRegion } from './joint-region';
import { KineticModel } from './model';
import { compileProblem } from './problem';
import { bootstrap, leaveOneRunOut } from './refit';
import { TrustStep } from './trust-step';

/** An irreversible loop: no real eigenbasis, so that every time costs a step of its own. */
const loop = fitRequest.parse({
	species: ['A', 'B', 'C'].map((id) => ({ id })),
	steps: ['AB', 'BC', 'CA'].map((pair, i) => ({
		id: `s${i + 1}`,
		reactant: pair[0],
		products: [{ species: pair[1] }],
		forward: { kRef: { value: 0.5 + 0.2 * i, unit: '1/h' } },
		reverse: null
	})),
	referenceTemperature: { value: 40, unit: 'degC' },
	runs: [
		{
			temperature: { value: 40, unit: 'degC' },
			initial: { A: { value: 1, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: ['A', 'B'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
			timepoints: Array.from({ length: 25 }, (_, k) => ({ time: (k + 1) / 4, values: { A: 0.4, B: 0.3 } }))
		}
	],
	options: { starts: 2, profiles: false }
});

/** The loop with values that its own curves make, and a ripple. */
function withCurves(): typeof loop {
	const made = structuredClone(loop);
	const model = new KineticModel(compileProblem(made).problem!);
	const x = Float64Array.from([0.5, 0.7, 0.9], (k) => Math.log(k / 3600));
	model.evaluate(x, new Float64Array(model.m), new Float64Array(model.m * model.p));
	model.points.forEach((point, i) => {
		const id = point.channel === 0 ? 'A' : 'B';
		made.runs[0].timepoints[point.index].values[id] = model.predictions[i] + 0.003 * Math.sin(5 * i);
	});
	return made;
}

describe('stopping a fit', () => {
	it('is asked for at every time of a long evaluation, not only before it', () => {
		const model = new KineticModel(compileProblem(loop).problem!);
		let asked = 0;
		model.watch = () => asked++;
		const x = Float64Array.from([0.5, 0.7, 0.9], (k) => Math.log(k / 3600));
		const residuals = new Float64Array(model.m);
		const jacobian = new Float64Array(model.m * model.p);
		expect(model.evaluate(x, residuals, jacobian)).toBe(true);
		expect(asked).toBeGreaterThanOrEqual(25);
		const before = residuals.slice();
		let left = 10;
		model.watch = watchOver(() => --left < 0);
		expect(() => model.evaluate(x, residuals, jacobian)).toThrow(FitCancelled);
		// A model that was stopped half way is as good as new.
		model.watch = null;
		model.evaluate(x, residuals, jacobian);
		expect(residuals).toEqual(before);
	});

	it('is asked for within a measured temperature program, at every piece of it', () => {
		const logged = structuredClone(loop);
		// 0.5 K up and down every quarter of an hour: 600 ramps, each a piece of its own.
		logged.runs[0].temperatureLog = Array.from({ length: 601 }, (_, k) => ({
			time: k / 96,
			celsius: 40 + 0.5 * (k % 2)
		}));
		const model = new KineticModel(compileProblem(logged).problem!);
		let asked = 0;
		model.watch = () => asked++;
		const x = Float64Array.from([0.5, 0.7, 0.9], (k) => Math.log(k / 3600));
		model.evaluate(x, new Float64Array(model.m), new Float64Array(model.m * model.p));
		expect(asked).toBeGreaterThanOrEqual(600);
	});

	it('is asked for every 512 values of a long run, and at every column of a tall matrix', () => {
		const long = structuredClone(loop);
		long.runs[0].timepoints = Array.from({ length: 2000 }, (_, k) => ({
			time: (k + 1) / 400,
			values: { A: 0.4, B: 0.3 }
		}));
		long.steps = long.steps.slice(0, 2);
		const model = new KineticModel(compileProblem(long).problem!);
		let asked = 0;
		model.watch = () => asked++;
		const x = Float64Array.from([0.5, 0.9], (k) => Math.log(k / 3600));
		const residuals = new Float64Array(model.m);
		const jacobian = new Float64Array(model.m * model.p);
		model.evaluate(x, residuals, jacobian);
		expect(asked).toBeGreaterThanOrEqual(Math.floor(model.m / 512));
		asked = 0;
		new TrustStep(model.m, 2).factor(jacobian, residuals, Int32Array.of(0, 1), 2, model.watch);
		expect(asked).toBe(2);
	});

	it('is asked for inside the evaluations of what follows a fit, not only between them', () => {
		const data = withCurves();
		const report = fit(data);
		const counted = (work: (hooks: FitHooks) => unknown) => {
			let asked = 0;
			work({ cancelled: () => (asked++, false) });
			return asked;
		};
		// Each of the 20 fits evaluates 25 times one after the other, at least twice.
		expect(counted((hooks) => bootstrap(report, data, { draws: 20 }, hooks))).toBeGreaterThan(20 * 2 * 25);
		const pair: [string, string] = ['s1.forward.kRef', 's2.forward.kRef'];
		expect(counted((hooks) => jointRegion(report, data, pair, { rays: 6 }, hooks))).toBeGreaterThan(
			6 * 2 * 25
		);
		const two = {
			...loop,
			runs: [loop.runs[0], { ...loop.runs[0], initial: { B: { value: 1, unit: 'mol/L' } } }]
		};
		const both = fit(two);
		expect(counted((hooks) => leaveOneRunOut(both, two, hooks))).toBeGreaterThan(2 * 2 * 25);
		let left = 60;
		expect(() => bootstrap(report, data, { draws: 20 }, { cancelled: () => --left < 0 })).toThrow(
			FitCancelled
		);
	});

	it('leaves the numbers of a fit that is only asked', () => {
		const asked = fit(loop, { cancelled: () => false });
		expect(JSON.stringify(asked)).toBe(JSON.stringify(fit(loop)));
	});

	it('works at every stage: whenever the answer turns, FitCancelled is thrown', () => {
		let calls = 0;
		fit(loop, { cancelled: () => (calls++, false) });
		for (const share of [0, 0.01, 0.3, 0.7, 0.99]) {
			let left = Math.floor(share * (calls - 1));
			expect(() => fit(loop, { cancelled: () => left-- <= 0 })).toThrow(FitCancelled);
		}
	});
});

describe('progress', () => {
	const told = (request: typeof loop) => {
		const seen: FitProgress[] = [];
		fit(request, { onProgress: (p) => seen.push(p) });
		return seen;
	};

	it('never goes back, begins near nothing and ends at the whole', () => {
		for (const options of [
			{ starts: 12, profiles: true },
			{ starts: 3, profiles: false }
		]) {
			const seen = told({ ...loop, options: { ...loop.options, ...options } });
			const fractions = seen.map((p) => p.fraction!);
			fractions.forEach((f, k) => expect(f).toBeGreaterThanOrEqual(k ? fractions[k - 1] : 0));
			expect(fractions[0]).toBeLessThan(0.2);
			expect(fractions[fractions.length - 1]).toBe(1);
			expect(seen[seen.length - 1].stage).toBe('finished');
		}
	});

	it('shares the whole out by the work of the stages: many starts take most of it, profiles of few parameters little', () => {
		const after = (starts: number) =>
			told({ ...loop, options: { ...loop.options, starts, profiles: true } })
				.filter((p) => p.stage.startsWith('searching'))
				.pop()!.fraction!;
		expect(after(40)).toBeGreaterThan(0.6);
		expect(after(2)).toBeLessThan(0.25);
	});
});
