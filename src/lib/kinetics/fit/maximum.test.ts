import { describe, expect, it } from 'vitest';
import { fitRequest, type FitRequest } from '../../schemas/fit';
import { fit } from './fit';
import { maxima } from './maximum';
import { profileCurves } from './profile-curve';
import { normalNumbers, uniformNumbers } from './sequence';

const K1 = 0.7;
const K2 = 0.2;
const truth = {
	A: (t: number) => Math.exp(-K1 * t),
	B: (t: number) => (K1 / (K1 - K2)) * (Math.exp(-K2 * t) - Math.exp(-K1 * t))
};

function chain(seed: number, scatter = 0.004): FitRequest {
	const normal = normalNumbers(uniformNumbers(seed));
	const rate = (value: number) => ({ kRef: { value, unit: '1/h' } });
	return fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
		steps: [
			{ id: 's1', reactant: 'A', products: [{ species: 'B' }], forward: rate(1), reverse: null },
			{ id: 's2', reactant: 'B', products: [{ species: 'C' }], forward: rate(0.1), reverse: null }
		],
		referenceTemperature: { value: 40, unit: 'degC' },
		runs: [
			{
				id: 'r1',
				temperature: { value: 40, unit: 'degC' },
				initial: { A: { value: 1, unit: 'mol/L' } },
				timeUnit: 'h',
				channels: ['A', 'B'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
				timepoints: [0.5, 1, 2, 3, 4, 6, 8, 12].map((time) => ({
					time,
					values: { A: truth.A(time) + scatter * normal(), B: truth.B(time) + scatter * normal() }
				}))
			}
		],
		options: { starts: 4, profiles: false }
	});
}

describe('the maximum of an intermediate', () => {
	it('lies at ln(k1/k2)/(k1 − k2) for two consecutive steps', () => {
		const request = chain(1, 1e-7);
		const [b, ...others] = maxima(fit(request), request, 0);
		// Textbook closed form of A → B → C.
		expect(b.time).toBeCloseTo(Math.log(K1 / K2) / (K1 - K2), 4);
		expect(b.value).toBeCloseTo((K1 / K2) ** (-K2 / (K1 - K2)), 5);
		expect(b.species).toBe('B');
		expect(others).toEqual([]);
	});

	it('has errors like the scatter of maxima over repeated experiments', () => {
		const found = Array.from({ length: 60 }, (_, k) => {
			const request = chain(k + 10);
			return maxima(fit(request), request, 0)[0];
		});
		const mean = found.reduce((a, m) => a + m.time, 0) / found.length;
		const spread = Math.sqrt(found.reduce((a, m) => a + (m.time - mean) ** 2, 0) / (found.length - 1));
		const stated = found.reduce((a, m) => a + m.timeError!, 0) / found.length;
		// 60 experiments give the spread to about ten percent (1/√(2·59)); four of these are allowed.
		expect(stated / spread).toBeGreaterThan(0.63);
		expect(stated / spread).toBeLessThan(1.6);
		expect(found.every((m) => m.timeInterval![0] < m.time && m.time < m.timeInterval![1])).toBe(true);
	});
});

describe('a profile to draw', () => {
	it('crosses the limit where the interval of the fit ends, and is zero at the estimate', () => {
		const request = fitRequest.parse({ ...chain(3), options: { starts: 4, profiles: true } });
		const report = fit(request);
		for (const curve of profileCurves(report, request)) {
			const [low, high] = report.parameters.find((p) => p.id === curve.id)!.profileCi95!;
			const at = (value: number) => {
				const k = curve.points.findIndex((p) => p.value >= value);
				const [a, b] = [curve.points[k - 1], curve.points[k]];
				return a.tau + ((b.tau - a.tau) * (value - a.value)) / (b.value - a.value);
			};
			expect(at(high!) / curve.limit).toBeCloseTo(1, 2);
			expect(at(low!) / curve.limit).toBeCloseTo(-1, 2);
			expect(curve.points.find((p) => p.tau === 0)!.value).toBeCloseTo(curve.estimate, 12);
		}
	});
});
