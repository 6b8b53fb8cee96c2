import { describe, expect, it } from 'vitest';
import { samplePlanRequest } from '../../schemas/fit-plan';
import { planSamplesFor } from './plan-samples';

const step = (id: string, from: string, to: string, k: number, energy?: unknown) => ({
	id,
	reactant: from,
	products: [{ species: to }],
	forward: { kRef: { value: k, unit: '1/h' }, ...(energy ? { activationEnergy: energy } : {}) }
});
const at50 = { value: 50, unit: 'degC' };
const seen = (id: string) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' });
const base = {
	species: ['A', 'B', 'C'].map((id) => ({ id })),
	steps: [step('s1', 'A', 'B', 0.7), step('s2', 'B', 'C', 0.2)],
	referenceTemperature: at50,
	run: {
		temperature: at50,
		initial: { A: { value: 1, unit: 'mol/L' } },
		timeUnit: 'h' as const,
		channels: [seen('B')]
	},
	error: { a: 0.01 },
	samples: 2,
	earliest: 0,
	latest: 20
};
const plan = (over: object = {}) => planSamplesFor(samplePlanRequest.parse({ ...base, ...over }));

describe('a sampling plan before the first run', () => {
	it('finds 1.23 and 6.86 h for 0.7 and 0.2 1/h (Box & Lucas 1959)', () => {
		const { times, timeUnit } = plan();
		expect(times[0]).toBeCloseTo(1.23, 2);
		expect(times[1]).toBeCloseTo(6.86, 2);
		expect(timeUnit).toBe('h');
	});

	it('foretells the half-widths that follow from the stated error: ln k of A → B by hand', () => {
		// y = e^{−kt}: ∂y/∂ln k = −kt e^{−kt}, largest at 1/k; three samples there, σ = 0.02, t(0.975, 2) = 4.302653.
		const { times, expected } = plan({
			steps: [step('s1', 'A', 'B', 0.4)],
			run: { ...base.run, channels: [seen('A')] },
			error: { a: 0.02 },
			samples: 3
		});
		for (const t of times) expect(t).toBeCloseTo(2.5, 2);
		const half = (4.302652729911275 * 0.02 * Math.E) / Math.sqrt(3);
		expect(expected[0].estimate).toBeCloseTo(0.4, 12);
		expect(expected[0].before).toBeNull();
		expect(expected[0].after! / (0.4 * half)).toBeCloseTo(1, 4);
	});

	it('moves the sample of a decay later where the error is proportional to the value', () => {
		// σ = b y: |∂y/∂ln k|/σ = kt/b grows with time until the constant part a takes over.
		const single = (error: object) =>
			plan({
				steps: [step('s1', 'A', 'B', 0.4)],
				run: { ...base.run, channels: [seen('A')] },
				samples: 1,
				error
			}).times[0];
		const late = single({ a: 0.001, b: 0.05 });
		expect(late).toBeGreaterThan(2 * single({ a: 0.05 }));
		// d/dt of t e^{−kt}/√(a² + b² e^{−2kt}) is zero: (1 − kt)(a² + b² e^{−2kt}) + kt b² e^{−2kt} = 0.
		const square = 0.05 ** 2 * Math.exp(-0.8 * late);
		expect((1 - 0.4 * late) * (0.001 ** 2 + square) + 0.4 * late * square).toBeCloseTo(0, 7);
	});

	it('takes an energy as known where the run has one temperature, and says so', () => {
		const steps = [step('s1', 'A', 'B', 0.7, { fit: true }), step('s2', 'B', 'C', 0.2)];
		const { times, findings, expected } = plan({ steps });
		expect(times[0]).toBeCloseTo(1.23, 2);
		expect(expected.map((e) => e.parameter)).toEqual(['s1.forward.kRef', 's2.forward.kRef']);
		expect(findings.find((f) => f.code === 'plan-energies-known')?.parameters).toEqual([
			's1.forward.activationEnergy'
		]);
		const run = { ...base.run, temperature: { value: 60, unit: 'degC' } };
		expect(() => plan({ steps, run })).toThrow(/activation energy of step s1 has no guess/);
	});

	it('says that as many values as parameters give no interval, and that guesses rule the times', () => {
		const codes = plan().findings.map((f) => f.code);
		expect(codes).toContain('plan-no-degrees-of-freedom');
		expect(codes).toContain('plan-at-guesses');
		expect(plan({ samples: 4 }).findings.map((f) => f.code)).not.toContain('plan-no-degrees-of-freedom');
	});

	it('can be stopped inside the exchange, with nothing else changed', () => {
		let asked = 0;
		const request = samplePlanRequest.parse({ ...base, samples: 6 });
		expect(planSamplesFor(request, { cancelled: () => (asked++, false) })).toEqual(planSamplesFor(request));
		// At least every 32nd of some 480 candidate times, for each of six samples, in two rounds.
		expect(asked).toBeGreaterThan(2 * 6 * 14);
		let left = 20;
		expect(() => planSamplesFor(request, { cancelled: () => --left < 0 })).toThrow(/cancelled/);
	});

	it('asks for what is missing by name', () => {
		const unknown = { ...base.run, initial: { A: { fit: true } } };
		expect(() => plan({ run: unknown })).toThrow(/r1\.initial\.A/);
		expect(() => plan({ channels: ['X'] })).toThrow(/"X" is not a channel/);
		expect(() => plan({ fixed: ['s9.forward.kRef'] })).toThrow(/s9\.forward\.kRef/);
		expect(() => plan({ latest: 0.0001, earliest: 1 })).toThrow(/latest time/);
	});
});
