/**
 * Derivatives against Van Loan's block matrix in extended precision, and against identities that they must obey.
 */
import { describe, expect, it } from 'vitest';
import { FAMILIES, randomCase, SystemBuilder } from './bench/families';
import { ExtendedPropagator } from './extended';
import { SensitivityWorkspace, sensitivities, type SensitivityParameter } from './sensitivity';
import { solve } from './solve';
import type { LinearSystem } from './types';

type Flow = NonNullable<LinearSystem['flows']>[number];
const rate = ({ step, direction }: Flow): SensitivityParameter => ({ kind: 'rate', step, direction });

/** The system beside a copy fed by one step: species n + i carries ∂c_i/∂ln k. */
function blockSystem(system: LinearSystem, flow: Flow): LinearSystem {
	const { n } = system;
	const outflow = new Float64Array(2 * n);
	outflow.set(system.outflow);
	outflow.set(system.outflow, n);
	const own = system.transfers.filter((t) => t.step === flow.step && t.direction === flow.direction);
	return {
		n: 2 * n,
		outflow,
		transfers: [
			...system.transfers,
			...system.transfers.map((t) => ({ ...t, from: t.from + n, to: t.to + n })),
			...own.map((t) => ({ ...t, to: t.to + n })),
			{ ...flow, to: flow.from + n, coefficient: -1 }
		],
		flows: [...system.flows!, ...system.flows!.map((f) => ({ ...f, from: f.from + n }))]
	};
}

function worstError(system: LinearSystem, charge: Float64Array, timesS: Float64Array, flows: Flow[]): number {
	const { n } = system;
	const found = sensitivities(system, charge, timesS, flows.map(rate));
	const start = new Float64Array(2 * n);
	start.set(charge);
	const total = charge.reduce((a, b) => a + b, 0);
	let worst = 0;
	flows.forEach((flow, p) => {
		const exact = new ExtendedPropagator(blockSystem(system, flow));
		timesS.forEach((timeS, k) => {
			const truth = exact.apply(timeS, start);
			for (let i = 0; i < n; i++) {
				const at = (p * timesS.length + k) * n + i;
				worst = Math.max(worst, Math.abs(truth[n + i] - found.derivatives[at]) / total);
			}
		});
	});
	return worst;
}

describe.each(FAMILIES)('derivatives on random networks: %s', (family) => {
	it('agree with the block matrix in extended precision to 1e-10 of the charge', () => {
		for (let seed = 1; seed <= 3; seed++) {
			const { system, charge, timesS } = randomCase(family, seed);
			if (system.flows!.length === 0) continue;
			const flows = [system.flows![0], system.flows![system.flows!.length >> 1]];
			expect(worstError(system, charge, timesS, flows), `seed ${seed}`).toBeLessThan(1e-10);
		}
	});
});

describe('derivatives', () => {
	const times = Float64Array.of(0.1, 2.5, 5, 60);

	it.each([0, 1e-15, 1e-12, 1e-9, 1e-6, 1e-3])(
		'hold through the degenerate point of A → B ⇌ C, gap %g',
		(gap) => {
			const system = new SystemBuilder(3)
				.step(0, [[1, 1]], 0.4 + gap)
				.step(1, [[2, 1]], 0.3, 0.1)
				.build();
			expect(worstError(system, Float64Array.of(1, 0, 0), times, system.flows!)).toBeLessThan(1e-13);
		}
	);
	it('hold for a fast equilibrium watched for long, k t = 1e10', () => {
		const system = new SystemBuilder(3)
			.step(0, [[1, 1]], 3e7, 1e7)
			.step(1, [[2, 1]], 1e-3)
			.build();
		expect(
			worstError(system, Float64Array.of(1, 0, 0), Float64Array.of(1, 300, 1000), system.flows!)
		).toBeLessThan(1e-12);
	});
	it('add up to t dc/dt when all constants grow alike', () => {
		const system = new SystemBuilder(4)
			.step(
				0,
				[
					[1, 1],
					[2, 1]
				],
				0.7
			)
			.step(1, [[2, 1]], 0.3, 0.2)
			.step(2, [[3, 2]], 0.05)
			.step(3, [], 0.4)
			.build();
		const charge = [0.8, 0.1, 0, 0.2];
		const found = sensitivities(system, charge, times, system.flows!.map(rate));
		const solution = solve(system, charge);
		times.forEach((timeS, k) =>
			solution.slope(timeS).forEach((slope, i) => {
				let sum = 0;
				for (let p = 0; p < system.flows!.length; p++)
					sum += found.derivatives[(p * times.length + k) * 4 + i];
				expect(Math.abs(sum - timeS * slope)).toBeLessThan(1e-13);
			})
		);
	});
	it('by an initial amount are the curves of a unit charge', () => {
		const system = new SystemBuilder(3)
			.step(0, [[1, 1]], 1)
			.step(1, [[2, 1]], 1)
			.build();
		const found = sensitivities(system, [3, 0, 0], times, [{ kind: 'charge', species: 1 }]);
		const unit = solve(system, [0, 1, 0]).curves(times);
		unit.forEach((value, j) => expect(found.derivatives[j]).toBeCloseTo(value, 14));
	});
	it('are zero for a step that carries nothing, and keep mass: they add up to zero', () => {
		const system = new SystemBuilder(3)
			.step(0, [[1, 1]], 0.4)
			.step(1, [[2, 1]], 0)
			.build();
		const found = sensitivities(system, [1, 0, 0], times, [
			{ kind: 'rate', step: 1, direction: 'forward' },
			{ kind: 'rate', step: 0, direction: 'forward' }
		]);
		expect(found.derivatives.slice(0, 12).every((value) => value === 0)).toBe(true);
		for (let k = 0; k < 4; k++) {
			const row = found.derivatives.slice(12 + 3 * k, 15 + 3 * k);
			expect(Math.abs(row[0] + row[1] + row[2])).toBeLessThan(1e-16);
		}
	});
	it('reuse the arrays of a workspace', () => {
		const build = (k: number) => new SystemBuilder(2).step(0, [[1, 1]], k).build();
		const workspace = new SensitivityWorkspace(2, times, [{ kind: 'rate', step: 0, direction: 'forward' }]);
		const { curves, derivatives } = workspace.evaluate(build(1), [1, 0]);
		const before = derivatives[0];
		expect(workspace.evaluate(build(2), [1, 0]).derivatives).toBe(derivatives);
		expect(curves[0]).toBeCloseTo(Math.exp(-0.2), 15);
		expect(before).toBeCloseTo(-0.1 * Math.exp(-0.1), 15);
		expect(derivatives[0]).toBeCloseTo(-0.2 * Math.exp(-0.2), 15);
		expect(workspace.method).toBe('divided differences');
	});
});
