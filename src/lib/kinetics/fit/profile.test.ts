import { describe, expect, it } from 'vitest';
import { fitRequest, type FitRequest } from '../../schemas/fit';
import { studentQuantile } from './distributions';
import { fit } from './fit';

const times = [0.1, 0.2, 0.4, 0.7, 1, 1.6, 2.5, 4, 6];
const [k1, k2, k3, k4] = [1, 0.22, 1.8, 0.7];

/** A → B → C → D → E by the sum of exponentials (Bateman, Proc. Cambridge Phil. Soc. 15 (1910) 423). */
function chain(t: number): number[] {
	const k = [k1, k2, k3, k4];
	return [0, 1, 2, 3].map((n) => {
		let sum = 0;
		for (let i = 0; i <= n; i++) {
			let term = Math.exp(-k[i] * t);
			for (let j = 0; j <= n; j++) if (j !== i) term /= k[j] - k[i];
			sum += term;
		}
		return k.slice(0, n).reduce((a, b) => a * b, 1) * sum;
	});
}

const step = (id: string, from: string, to: string, k: number, reverse: unknown = null) => ({
	id,
	reactant: from,
	products: [{ species: to }],
	forward: { kRef: { value: k, unit: '1/h' } },
	reverse
});

/** Data of one-way steps, fitted with B ⇌ C: the equilibrium constant runs to its upper bound. C is not assayed. */
function oneWay(phase: number, equilibrium = 7, options: Record<string, unknown> = {}): FitRequest {
	return fitRequest.parse({
		species: ['A', 'B', 'C', 'D', 'E'].map((id) => ({ id })),
		steps: [
			step('s1', 'A', 'B', 1),
			step('s2', 'B', 'C', 0.2, { equilibriumConstant: { value: equilibrium, unit: '1' } }),
			step('s3', 'C', 'D', 1.5),
			step('s4', 'D', 'E', 0.6)
		],
		referenceTemperature: { value: 40, unit: 'degC' },
		runs: [0, 1].map((r) => ({
			id: `r${r + 1}`,
			temperature: { value: 40, unit: 'degC' },
			initial: { A: { value: 1, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: ['A', 'B', 'D'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
			timepoints: times.map((time, i) => {
				const [a, b, , d] = chain(time);
				const noisy = (value: number, j: number) => value + 0.01 * Math.sin(phase + 13 * i + 5 * j + 31 * r);
				return { time, values: { A: noisy(a, 0), B: noisy(b, 1), D: noisy(d, 2) } };
			})
		})),
		options: { starts: 8, ...options }
	});
}

describe('profile intervals', () => {
	it.each([0, 1.7, 6.8])(
		'end where a fit with the parameter held there reaches SSR(1 + t²/ν), also from a bound (scatter of phase %s)',
		(phase) => {
			const report = fit(oneWay(phase));
			const id = 's2.reverse.equilibriumConstant';
			const found = report.parameters.find((p) => p.id === id)!;
			expect(found.state).toBe('at bound');
			const [lower, upper] = found.profileCi95!;
			expect(upper).toBeNull();
			const held = fit(oneWay(phase, lower!, { fixed: [id], profiles: false }));
			const t = studentQuantile(0.975, report.degreesOfFreedom);
			const target = report.weightedSsr * (1 + (t * t) / report.degreesOfFreedom);
			expect(held.weightedSsr / target).toBeCloseTo(1, 4);
		}
	);
});

describe('a constant known only in its product with a response factor', () => {
	// Invented: A → B → C followed while C grows in proportion to k₂ f; scatter larger than the curvature that would tell them apart.
	const [k1, k2] = [1, 0.02];
	const c = (t: number) => 1 - (k1 * Math.exp(-k2 * t) - k2 * Math.exp(-k1 * t)) / (k1 - k2);
	const scatter = [1, -1, 0.5, -0.5, -1, 1, -0.5, 0.5];
	const request = fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
		steps: [
			{ id: 's1', reactant: 'A', products: [{ species: 'B' }], forward: { kRef: { value: 1, unit: '1/h' } } },
			{
				id: 's2',
				reactant: 'B',
				products: [{ species: 'C' }],
				forward: { kRef: { value: 0.02, unit: '1/h' } }
			}
		],
		referenceTemperature: { value: 50, unit: 'degC' },
		runs: [
			{
				temperature: { value: 50, unit: 'degC' },
				initial: { A: { value: 1, unit: 'mol/L' } },
				timeUnit: 'h',
				channels: [
					{ id: 'A', weights: { A: 1 }, unit: 'mol/L' },
					{ id: 'C', weights: { C: 1 }, unit: 'area', responseFactor: { fit: true } }
				],
				timepoints: [0.5, 1, 1.5, 2, 3, 4, 5, 6].map((time, i) => ({
					time,
					values: { A: Math.exp(-k1 * time) + 0.004 * scatter[i], C: 2 * c(time) + 0.004 * scatter[7 - i] }
				}))
			}
		],
		options: { starts: 6 }
	});

	it('is open below, although the response factor meets a bound of the search there', () => {
		const report = fit(request);
		const of = (id: string) => report.parameters.find((q) => q.id === id)!.profileCi95!;
		expect(of('C.responseFactor')[1]).toBeNull();
		expect(of('s2.forward.kRef')[0]).toBeNull();
		expect(of('s2.forward.kRef')[1]).toBeGreaterThan(k2);
		expect(of('s1.forward.kRef').every((end) => end !== null)).toBe(true);
	});

	it('is limited below where the person gives the bound', () => {
		const upper = { value: 20, unit: '1' };
		const bounded = { ...request.options, bounds: { 'C.responseFactor': { upper } } };
		const report = fit({ ...request, options: bounded });
		const limit = report.parameters.find((q) => q.id === 's2.forward.kRef')!.profileCi95![0]!;
		expect(limit).toBeGreaterThan(1e-3);
		expect(limit).toBeLessThan(3e-3);
	});
});
