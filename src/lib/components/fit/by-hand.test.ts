import { describe, expect, it } from 'vitest';
import { fit } from '$lib/kinetics/fit/fit';
import { fitRequest } from '$lib/schemas/fit';
import { Bench } from './by-hand';

const request = fitRequest.parse({
	species: [{ id: 'A' }, { id: 'B' }],
	steps: [
		{ id: 's1', reactant: 'A', products: [{ species: 'B' }], forward: { kRef: { value: 2, unit: '1/h' } } }
	],
	referenceTemperature: { value: 40, unit: 'degC' },
	runs: [
		{
			id: 'r1',
			temperature: { value: 40, unit: 'degC' },
			initial: { A: { value: 1, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
			timepoints: [0.5, 1, 2, 4].map((time, i) => ({
				time,
				values: { A: Math.exp(-0.5 * time) + [0.01, -0.01, 0.01, -0.01][i] }
			}))
		}
	],
	options: { starts: 2, profiles: false }
});

describe('constants moved by hand', () => {
	it('begin at the scheme, or at the estimates of a fit', () => {
		const bench = new Bench(request);
		expect(bench.reported(0, bench.handles({})[0].start)).toBeCloseTo(2, 10);
		expect(bench.reported(0, bench.handles({ 's1.forward.kRef': 0.7 })[0].start)).toBeCloseTo(0.7, 10);
	});

	it('have the misfit of the fit at its estimates, and a larger one elsewhere', () => {
		const report = fit(request);
		const bench = new Bench(request);
		const at = bench.position(0, report.parameters[0].estimate)!;
		const best = bench.view(Float64Array.of(at))!;
		expect(best.ssr).toBeCloseTo(report.weightedSsr, 12);
		expect(best.s).toBeCloseTo(report.residualStandardError!, 10);
		expect(bench.view(Float64Array.of(at + 0.3))!.ssr).toBeGreaterThan(best.ssr);
	});

	it('draw the closed form of the run', () => {
		const bench = new Bench(request);
		const [run] = bench.view(Float64Array.of(bench.position(0, 0.5)!))!.runs;
		const { values } = run.channels[0];
		run.times.forEach((t, k) => expect(values[k]).toBeCloseTo(Math.exp(-0.5 * t), 12));
	});
});
