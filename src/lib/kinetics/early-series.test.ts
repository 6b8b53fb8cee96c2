import { describe, expect, it } from 'vitest';
import { SystemBuilder } from './bench/families';
import { earlyCurves, fastestOutflow, isEarly } from './early-series';
import { Propagator } from './propagator';
import { solve } from './solve';

/** Four steps down a chain of constants k: A → B → C → D → E. */
function chain(constants: number[]) {
	const builder = new SystemBuilder(constants.length + 1);
	constants.forEach((k, i) => builder.step(i, [[i + 1, 1]], k));
	return builder.build();
}

describe('many early times at once', () => {
	it('gives the trace product of a chain of equal constants to rounding: k⁴t⁴/24 e^{−kt}(1 + kt/5 + …) (Bateman 1910)', () => {
		const system = chain([1, 1, 1, 1]);
		const out = new Float64Array(5 * 101);
		const grid = { firstS: 0, stepS: 0.01, count: 101 };
		earlyCurves(system, fastestOutflow(system), [1, 0, 0, 0, 0], grid, out);
		for (let k = 0; k <= 100; k++) {
			const t = k * 0.01;
			// 1 − e^{−t}(1 + t + t²/2 + t³/6) as its series, which does not cancel
			let exact = 0;
			for (let m = 30; m >= 4; m--) {
				let term = 1;
				for (let i = 1; i <= m; i++) term *= t / i;
				exact += term;
			}
			exact *= Math.exp(-t);
			expect(Math.abs(out[5 * k + 4] - exact)).toBeLessThanOrEqual(1e-14 * exact);
		}
		expect([...out.subarray(0, 5)]).toEqual([1, 0, 0, 0, 0]);
	});

	it('agrees with the evaluation time by time, also where a reversible step is slow beside the fastest', () => {
		const system = new SystemBuilder(4)
			.step(0, [[1, 1]], 1e-6, 3)
			.step(1, [[2, 2]], 2e-4)
			.step(2, [[3, 1]], 0.5, 1e-9)
			.build();
		const shift = fastestOutflow(system);
		const grid = { firstS: 0.01, stepS: 0.005, count: 60 };
		expect(isEarly(shift, 0.01 + 59 * 0.005)).toBe(true);
		const charge = [1, 0, 0, 0];
		const out = new Float64Array(4 * grid.count);
		earlyCurves(system, shift, charge, grid, out);
		const propagator = new Propagator(system);
		for (let k = 0; k < grid.count; k++) {
			const truth = propagator.apply(grid.firstS + k * grid.stepS, charge);
			for (let s = 0; s < 4; s++)
				expect(Math.abs(out[4 * k + s] - truth[s])).toBeLessThanOrEqual(5e-14 * truth[s]);
		}
	});

	it('keeps a grid of curves right in relative terms from its first time on', () => {
		const system = chain([0.9, 0.7, 0.5, 0.3]);
		const times = Float64Array.from({ length: 200 }, (_, k) => k * 0.01);
		const charge = [1, 0, 0, 0, 0];
		const curves = solve(system, charge).curves(times);
		const propagator = new Propagator(system);
		for (let k = 1; k < times.length; k++) {
			const truth = propagator.apply(times[k], charge);
			for (let s = 0; s < 5; s++)
				expect(Math.abs(curves[5 * k + s] - truth[s])).toBeLessThanOrEqual(1e-9 * truth[s]);
		}
	});
});
