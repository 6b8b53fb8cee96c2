import { describe, expect, it } from 'vitest';
import { fitRequest, type FitRequest } from '../../schemas/fit';
import { fQuantile } from './distributions';
import { fit } from './fit';
import { jointRegion } from './joint-region';
import { bootstrap, leaveOneRunOut, withExcludedValues } from './refit';
import { normalNumbers, uniformNumbers } from './sequence';

const times = [0.5, 1, 2, 3, 5, 8];
function decays(rates: number[], over: (r: number) => object = () => ({})): FitRequest {
	const normal = normalNumbers(uniformNumbers(5));
	return fitRequest.parse({
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
		runs: rates.map((k, r) => ({
			id: `r${r + 1}`,
			temperature: { value: 40, unit: 'degC' },
			initial: { A: { value: 1, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
			timepoints: times.map((time) => ({ time, values: { A: Math.exp(-k * time) + 0.005 * normal() } })),
			...over(r)
		})),
		options: { starts: 4 }
	});
}

describe('leaving out one run', () => {
	it('points at the run on which the result hangs', () => {
		const request = decays([0.4, 0.4, 0.4, 0.5]);
		const found = leaveOneRunOut(fit(request), request);
		const worst = found.reduce((a, b) => (b.largestShift! > a.largestShift! ? b : a));
		expect(worst.run).toBe('r4');
		expect(worst.parameters![0].estimate).toBeCloseTo(0.4, 1);
		expect(worst.largestShift!).toBeGreaterThan(2);
	});

	it('has nothing to say of a single run', () => {
		const request = decays([0.4]);
		expect(leaveOneRunOut(fit(request), request)).toEqual([]);
	});
});

describe('excluded values', () => {
	it('are put back for a second fit beside the first', () => {
		const exclusions = [{ index: 3, channel: 'A', reasonCode: 'assay error', reason: 'integration failed' }];
		const request = decays([0.4, 0.4], (r) => (r === 0 ? { exclusions } : {}));
		expect(fit(request).pointsUsed).toBe(11);
		expect(withExcludedValues(request)!.pointsUsed).toBe(12);
		expect(withExcludedValues(decays([0.4]))).toBeNull();
	});
});

describe('the parametric bootstrap', () => {
	it('spreads as the standard error says, and repeats with its seed', () => {
		const request = decays([0.4, 0.4]);
		const report = fit(request);
		const first = bootstrap(report, request, { draws: 300, seed: 3 });
		const mean = first.draws.reduce((a, d) => a + d[0], 0) / 300;
		const sd = Math.sqrt(first.draws.reduce((a, d) => a + (d[0] - mean) ** 2, 0) / 299);
		expect(sd / report.parameters[0].logStandardError!).toBeGreaterThan(0.85);
		expect(sd / report.parameters[0].logStandardError!).toBeLessThan(1.15);
		expect(first.intervals[0].low).toBeLessThan(report.parameters[0].estimate);
		expect(bootstrap(report, request, { draws: 20, seed: 3 }).draws[19]).toEqual(first.draws[19]);
	});
});

describe('the joint region of two parameters', () => {
	const request = decays([0.4], () => ({
		initial: { A: { fit: true, guess: { value: 1, unit: 'mol/L' } } }
	}));
	const report = fit(request);
	const region = jointRegion(report, request, ['s1.forward.kRef', 'r1.initial.A'], { rays: 16 });

	it('has on its edge the misfit that the F distribution asks for', () => {
		// c06c-style check without the engine: two parameters, so nothing is left to re-optimise.
		const threshold = report.weightedSsr * (1 + (2 * fQuantile(0.95, 2, 4)) / 4);
		const y = request.runs[0].timepoints.map((t) => t.values.A as number);
		for (const { at, open } of region.edge) {
			expect(open).toBe(false);
			const ssr = times.reduce((a, t, i) => a + (at[1] * Math.exp(-at[0] * t) - y[i]) ** 2, 0);
			expect(ssr / threshold).toBeCloseTo(1, 4);
		}
	});

	it('lies near the ellipse for nearly linear data, and refuses parameters that are not fitted', () => {
		region.edge.forEach(({ at }, k) => expect(at[0] / region.ellipse[k][0]).toBeCloseTo(1, 1));
		expect(() => jointRegion(report, request, ['s1.forward.kRef', 'x'])).toThrow(RangeError);
	});
});

describe('every report', () => {
	it('survives JSON unchanged: no NaN or Infinity anywhere', () => {
		const noScatter = decays([0.4]);
		noScatter.runs[0].timepoints.forEach((t) => (t.values.A = Math.exp(-0.4 * t.time)));
		const oneValue = decays([0.4]);
		oneValue.runs[0].timepoints.splice(1);
		const undetermined = decays([0.4], () => ({
			initial: { A: { fit: true, guess: { value: 1, unit: 'mol/L' } } },
			timeOffset: { fit: true }
		}));
		const fixed = fitRequest.parse({ ...decays([0.4]), options: { fixed: ['s1.forward.kRef'] } });
		for (const request of [noScatter, oneValue, undetermined, fixed]) {
			const report = fit(request);
			expect(JSON.parse(JSON.stringify(report))).toEqual(report);
		}
		expect(fit(noScatter).findings.map((f) => f.code)).toContain('no-scatter');
	});
});
