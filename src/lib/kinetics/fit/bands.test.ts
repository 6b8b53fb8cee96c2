import { describe, expect, it } from 'vitest';
import { fitRequest } from '../../schemas/fit';
import { confirmationRun, predict } from './bands';
import { studentQuantile } from './distributions';
import { fit } from './fit';

const times = [0.5, 1, 2, 3, 5, 8];
const noise = [0.004, -0.003, 0.002, -0.004, 0.003, -0.001];
const decay = (over: Record<string, unknown> = {}) => ({
	id: 'r1',
	temperature: { value: 40, unit: 'degC' },
	initial: { A: { value: 1, unit: 'mol/L' } },
	timeUnit: 'h',
	channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
	timepoints: times.map((time, i) => ({ time, values: { A: Math.exp(-0.4 * time) + noise[i] } })),
	...over
});
const request = fitRequest.parse({
	species: [{ id: 'A' }, { id: 'B' }],
	steps: [
		{
			id: 's1',
			reactant: 'A',
			products: [{ species: 'B' }],
			forward: { kRef: { value: 1, unit: '1/h' } },
			reverse: null
		}
	],
	referenceTemperature: { value: 40, unit: 'degC' },
	runs: [decay()]
});
const report = fit(request);

describe('bands of a single decay, against the formula by hand', () => {
	const k = report.parameters[0].estimate;
	const se = report.parameters[0].standardError!;
	const t = studentQuantile(0.975, 5);

	it('gives t·|∂c/∂k|·se for the confidence band and adds s for the prediction band', () => {
		const { series } = predict(report, request, request.runs[0], [0, 1, 4]);
		const channel = series.find((x) => x.kind === 'channel')!;
		[0, 1, 4].forEach((time, i) => {
			const half = t * time * Math.exp(-k * time) * se;
			expect(channel.curve[i]).toBeCloseTo(Math.exp(-k * time), 12);
			expect(channel.confidence![1][i] - channel.curve[i]).toBeCloseTo(half, 12);
			const wide = Math.hypot(half, t * report.residualStandardError!);
			expect(channel.curve[i] - channel.prediction![0][i]).toBeCloseTo(wide, 12);
		});
	});

	it('bands a species that is not assayed, without a prediction band for it', () => {
		const { series } = predict(report, request, request.runs[0], [2]);
		const product = series.find((x) => x.kind === 'species' && x.id === 'B')!;
		expect(product.curve[0]).toBeCloseTo(1 - Math.exp(-2 * k), 12);
		expect(product.confidence![0][0]).toBeLessThan(product.curve[0]);
		expect(product.prediction).toBeNull();
	});

	it('predicts a run with another charge and says when its temperature was not studied', () => {
		const other = fitRequest.shape.runs.parse([
			decay({
				id: 'x',
				initial: { A: { value: 0.5, unit: 'mol/L' } },
				temperature: { value: 55, unit: 'degC' }
			})
		])[0];
		const { series, findings } = predict(report, request, other, [1]);
		expect(series[0].curve[0]).toBeCloseTo(0.5 * Math.exp(-k), 12);
		expect(findings.map((f) => f.code)).toContain('outside-studied-temperature');
	});
});

describe('a confirmation run', () => {
	it('counts the values inside the prediction band and lists limits apart', () => {
		const run = fitRequest.shape.runs.parse([
			decay({
				id: 'c1',
				timepoints: [
					{ time: 0, values: { A: 1 } },
					{ time: 1, values: { A: 0.672 } },
					{ time: 2, values: { A: 0.6 } },
					{ time: 4, values: { A: 0.2 } },
					{ time: 30, values: { A: { below: 0.02 } } },
					{ time: 6, values: { A: null } }
				]
			})
		])[0];
		const outcome = confirmationRun(report, request, run);
		expect([outcome.inside, outcome.counted]).toEqual([2, 3]);
		expect(outcome.points.find((p) => p.time === 2)!.inside).toBe(false);
		expect(outcome.points.find((p) => p.kind === 'below')!.inside).toBe(true);
	});

	it('is not taken for the fitted run whose id it happens to share', () => {
		const local = fitRequest.parse({
			...request,
			runs: [
				decay({
					initial: { A: { fit: true, guess: { value: 1, unit: 'mol/L' } } },
					timeOffset: { value: 0.1, unit: 'h' }
				}),
				decay({ id: 'prediction' })
			]
		});
		const fitted = fit(local);
		const k = fitted.parameters.find((p) => p.id === 's1.forward.kRef')!.estimate;
		// Another charge and another clock under the same id, as both labs count their runs from one.
		const run = fitRequest.shape.runs.parse([
			decay({
				id: 'r1',
				initial: { A: { fit: true, guess: { value: 0.5, unit: 'mol/L' } } },
				timeOffset: { fit: true, guess: { value: 0, unit: 'h' } },
				timepoints: [{ time: 2, values: { A: 0.5 * Math.exp(-2 * k) } }]
			})
		])[0];
		const [point] = confirmationRun(fitted, local, run).points;
		expect(point.predicted).toBeCloseTo(0.5 * Math.exp(-2 * k), 10);
		// As a run of the request the same id does mean that run's own estimate.
		const own = predict(fitted, local, local.runs[0], [2], { only: ['A'] }).series[0].curve[0];
		const amount = fitted.parameters.find((p) => p.id === 'r1.initial.A')!.estimate;
		expect(own).toBeCloseTo(amount * Math.exp(-2.1 * k), 10);
		// The fit itself stays as it was: the other run keeps its data and its place.
		expect(confirmationRun(fitted, local, { ...run, id: 'prediction' }).points[0].predicted).toBe(
			point.predicted
		);
	});

	it('asks for a charge that it neither states nor guesses', () => {
		const run = fitRequest.shape.runs.parse([decay({ id: 'r1', initial: { A: { fit: true } } })])[0];
		expect(() => confirmationRun(report, request, run)).toThrow('The charge of A in the run to predict');
	});
});
