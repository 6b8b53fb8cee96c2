import { describe, expect, it, vi } from 'vitest';
import type { Direction } from './spectral';
import { StepExponential } from '../step-exponential';
import { StepPropagator } from './step-propagator';

describe('equally spaced times on the way through matrices', () => {
	// A driven loop with one fast step: q h is some thousands.
	const directions: Direction[] = [
		{ from: 0, products: [{ to: 1, coefficient: 1 }] },
		{ from: 1, products: [{ to: 2, coefficient: 1 }] },
		{ from: 2, products: [{ to: 0, coefficient: 1 }] }
	];
	const constants = Float64Array.of(0.4, 3e4, 0.7);
	const charge = Float64Array.of(1, 0, 0);
	const storage = (times: number) => ({
		curves: new Float64Array(times * 3),
		rateDerivatives: new Float64Array(3 * times * 3),
		chargeDerivatives: new Float64Array(times * 3)
	});

	it('share one exponential, and give what each time gives by itself', () => {
		const times = Float64Array.from({ length: 40 }, (_, k) => 0.1 * (k + 1));
		const made = vi.spyOn(StepExponential.prototype, 'compute');
		const out = storage(40);
		expect(new StepPropagator(3, directions, [0, 1, 2], [0]).run(constants, charge, times, out)).toBe(true);
		expect(made.mock.calls.length).toBeLessThan(4);
		made.mockRestore();
		times.forEach((t, k) => {
			const alone = storage(1);
			new StepPropagator(3, directions, [0, 1, 2], [0]).run(constants, charge, Float64Array.of(t), alone);
			for (let i = 0; i < 3; i++) {
				expect(Math.abs(out.curves[k * 3 + i] - alone.curves[i])).toBeLessThan(1e-13);
				for (let r = 0; r < 3; r++)
					expect(
						Math.abs(out.rateDerivatives[(r * 40 + k) * 3 + i] - alone.rateDerivatives[r * 3 + i])
					).toBeLessThan(1e-12);
			}
		});
	});

	it('are made anew for other constants and other intervals', () => {
		const propagator = new StepPropagator(3, directions, [0], []);
		const made = vi.spyOn(StepExponential.prototype, 'compute');
		const out = storage(3);
		propagator.run(constants, charge, Float64Array.of(0.1, 0.3, 0.6), out);
		propagator.run(Float64Array.of(0.5, 3e4, 0.7), charge, Float64Array.of(0.1, 0.2, 0.3), out);
		expect(made.mock.calls.length).toBeGreaterThanOrEqual(4);
		made.mockRestore();
	});
});
