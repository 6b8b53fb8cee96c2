import { describe, expect, it } from 'vitest';
import { SystemBuilder } from './bench/families';
import { ExtendedPropagator } from './extended';
import { solve } from './solve';
import type { LinearSystem } from './types';

const sum = (values: ArrayLike<number>) => Array.from(values).reduce((a, b) => a + b, 0);
const first = (n: number) => Float64Array.from({ length: n }, (_, i) => (i === 0 ? 1 : 0));

/** Largest difference from extended precision at the given times, of the total charge. */
function error(system: LinearSystem, charge: Float64Array, times: number[]): number {
	const truth = new ExtendedPropagator(system);
	const solution = solve(system, charge);
	return Math.max(
		...times.map((t) => {
			const exact = truth.apply(t, charge);
			return Math.max(...solution.at(t).map((c, i) => Math.abs(c - exact[i]))) / sum(charge);
		})
	);
}

const torture = (gap: number) =>
	new SystemBuilder(3)
		.step(0, [[1, 1]], 0.4 + gap)
		.step(1, [[2, 1]], 0.3, 0.1)
		.build();

describe('A → B ⇌ C with 0.4, 0.3, 0.1, whose matrix is defective', () => {
	it('gives the concentrations worked out for it at 2.5 and 5', () => {
		// Figures to five decimals of a worked example of ours; exact: c_A = e^{-0.4 t}.
		const solution = solve(torture(0), first(3));
		const expected = [
			[2.5, 0.36788, 0.43394, 0.19818],
			[5, 0.13534, 0.41917, 0.4455]
		];
		for (const [t, a, b, c] of expected) {
			const at = solution.at(t);
			[a, b, c].forEach((value, i) => expect(at[i]).toBeCloseTo(value, 5));
			expect(at[0]).toBeCloseTo(Math.exp(-0.4 * t), 15);
		}
		expect(solution.method).toBe('confluent');
	});
	it.each([1e-3, 1e-6, 1e-9, 1e-12, 1e-15])('keeps every digit with a gap of %g', (gap) => {
		expect(error(torture(gap), first(3), [0.01, 1, 2.5, 5, 40])).toBeLessThan(1e-13);
		const shift = solve(torture(gap), first(3)).at(2.5)[1] - solve(torture(0), first(3)).at(2.5)[1];
		expect(Math.abs(shift)).toBeLessThan(gap + 1e-15);
	});
});

describe('exact cases', () => {
	it.each([4, 5, 8, 12])(
		'a chain of %i species with equal constants follows the Poisson distribution',
		(n) => {
			const builder = new SystemBuilder(n);
			for (let i = 0; i + 1 < n; i++) builder.step(i, [[i + 1, 1]], 0.7);
			const solution = solve(builder.build(), first(n));
			expect(solution.modes.map((mode) => mode.multiplicity)).toEqual([n - 1, 1]);
			let term = Math.exp(-0.7 * 3);
			const at = solution.at(3);
			for (let i = 0; i + 1 < n; i++) {
				expect(Math.abs(at[i] - term)).toBeLessThan(1e-15);
				term *= (0.7 * 3) / (i + 1);
			}
		}
	);
	it('an irreversible loop oscillates: its pair is −1.5 ± 0.866 i', () => {
		const system = new SystemBuilder(3)
			.step(0, [[1, 1]], 1)
			.step(1, [[2, 1]], 1)
			.step(2, [[0, 1]], 1)
			.build();
		const solution = solve(system, first(3));
		const pair = solution.modes.find((mode) => mode.im > 0)!;
		expect(pair.re).toBeCloseTo(-1.5, 14);
		expect(pair.im).toBeCloseTo(Math.sqrt(0.75), 14);
		const at = solution.at(1);
		expect(at[0]).toBeCloseTo(1 / 3 + (2 / 3) * Math.exp(-1.5) * Math.cos(Math.sqrt(0.75)), 14);
		// The worked example's figures to five decimals; they add up to 1.00001, so the last place is uncertain.
		[0.42971, 0.38328, 0.18702].forEach((value, i) => expect(Math.abs(at[i] - value)).toBeLessThan(1e-5));
	});
	it('rates of 1e6, 1 and 1e-6 in one chain', () => {
		const system = new SystemBuilder(4)
			.step(0, [[1, 1]], 1e6)
			.step(1, [[2, 1]], 1)
			.step(2, [[3, 1]], 1e-6)
			.build();
		expect(error(system, first(4), [1e-7, 1e-3, 1, 1e3, 1e6, 1e8])).toBeLessThan(1e-14);
		expect(solve(system, first(4)).modes.map((mode) => mode.re)).toEqual([-1e6, -1, -1e-6, 0]);
	});
	it('a fast equilibrium that drains through a step 1e12 times slower', () => {
		const system = new SystemBuilder(3)
			.step(0, [[1, 1]], 3e6, 1e6)
			.step(1, [[2, 1]], 1e-6)
			.build();
		expect(error(system, first(3), [1e-9, 1e-6, 1, 1e6, 1e8])).toBeLessThan(1e-13);
		const slow = solve(system, first(3)).modes[1].re;
		// Quasi-equilibrium to first order: three quarters of the material sits in B.
		expect(slow).toBeCloseTo(-0.75e-6, 12);
	});
	it('two parts that have nothing to do with each other', () => {
		const system = new SystemBuilder(4)
			.step(0, [[1, 1]], 0.5)
			.step(2, [[3, 1]], 0.5)
			.build();
		const solution = solve(system, [1, 0, 2, 0]);
		expect(solution.method).toBe('triangular');
		const at = solution.at(2);
		expect(at[1]).toBeCloseTo(1 - Math.exp(-1), 15);
		expect(at[3]).toBeCloseTo(2 - 2 * Math.exp(-1), 15);
	});
	it('constants of zero, of 1e-12, and no steps at all', () => {
		const still = solve(new SystemBuilder(2).step(0, [[1, 1]], 0).build(), [0.3, 0.7]);
		expect(Array.from(still.at(1e9))).toEqual([0.3, 0.7]);
		const slow = solve(new SystemBuilder(2).step(0, [[1, 1]], 1e-12).build(), [1, 0]);
		expect(slow.at(1)[1] / 1e-12).toBeCloseTo(1, 11);
		expect(solve({ n: 1, transfers: [], outflow: new Float64Array(1) }, [4]).at(7)[0]).toBe(4);
	});
	it('A → 2 B with B → ½ A keeps A + ½ B', () => {
		const system = new SystemBuilder(2)
			.step(0, [[1, 2]], 0.3)
			.step(1, [[0, 0.5]], 0.2)
			.build();
		const solution = solve(system, first(2));
		for (const t of [0.1, 3, 100]) expect(solution.at(t)[0] + solution.at(t)[1] / 2).toBeCloseTo(1, 14);
		expect(solution.final[0]).toBeCloseTo(0.4, 14);
	});
	it('a constant feed grows without limit, and says so', () => {
		const feed: LinearSystem = {
			n: 2,
			transfers: [{ from: 0, to: 1, rate: 2, coefficient: 1, step: -1, direction: 'forward' }],
			outflow: new Float64Array(2)
		};
		const solution = solve(feed, [1, 0]);
		expect(solution.at(5)[1]).toBeCloseTo(10, 13);
		expect(solution.final[1]).toBe(Infinity);
	});
});

/** Constants 3 % apart: too far to group, too near to tell apart. */
function closeChain(n: number): LinearSystem {
	const builder = new SystemBuilder(n);
	for (let i = 0; i + 1 < n; i++) builder.step(i, [[i + 1, 1]], 1 + 0.03 * i);
	return builder.build();
}

describe('promises of a solution', () => {
	const system = new SystemBuilder(5)
		.step(0, [[1, 1]], 1)
		.step(1, [[2, 1]], 0.8)
		.step(2, [[3, 1]], 0.5)
		.step(3, [[4, 1]], 0.3)
		.build();

	it('returns the charge itself at t = 0', () => {
		const charge = [0.1, 0.2, 0.30000000000000004, 0, 1e-300];
		expect(Array.from(solve(system, charge).at(0))).toEqual(charge);
	});
	it('keeps a trace product four steps down a chain right to 1e-9 of itself', () => {
		const exact = new ExtendedPropagator(system);
		const solution = solve(system, first(5));
		for (const t of [1e-5, 1e-4, 3e-3, 1e-2, 0.1]) {
			const truth = exact.apply(t, first(5))[4];
			expect(Math.abs(solution.at(t)[4] / truth - 1), `t = ${t}, c = ${truth}`).toBeLessThan(1e-9);
		}
		expect(exact.apply(3e-3, first(5))[4]).toBeLessThan(1e-12);
	});
	it('writes into the arrays it is given', () => {
		const solution = solve(system, first(5));
		const out = new Float64Array(10);
		expect(solution.curves([0, 2], out)).toBe(out);
		expect(Array.from(out.slice(5))).toEqual(Array.from(solution.at(2)));
	});
	it('draws an equally spaced grid as it would each time alone', () => {
		const solution = solve(system, first(5));
		const times = Float64Array.from({ length: 2000 }, (_, k) => k * 0.01);
		const curves = solution.curves(times);
		for (const k of [0, 1, 2, 17, 500, 1999])
			solution.at(times[k]).forEach((c, i) => expect(Math.abs(curves[k * 5 + i] - c)).toBeLessThan(4e-15));
	});
	it.each<[string, LinearSystem]>([
		[
			'pairs',
			new SystemBuilder(3)
				.step(0, [[1, 1]], 1)
				.step(1, [[2, 1]], 1)
				.step(2, [[0, 1]], 1)
				.build()
		],
		[
			'equal constants',
			new SystemBuilder(4)
				.step(0, [[1, 1]], 1)
				.step(1, [[2, 1]], 1)
				.step(2, [[3, 1]], 1)
				.build()
		],
		['a chain without a usable closed form', closeChain(12)]
	])('draws grids of %s as extended precision does', (_, other) => {
		const exact = new ExtendedPropagator(other);
		const times = Float64Array.from({ length: 101 }, (__, k) => k * 0.2);
		const curves = solve(other, first(other.n)).curves(times);
		for (const k of [0, 1, 3, 40, 100])
			exact
				.apply(times[k], first(other.n))
				.forEach((c, i) => expect(Math.abs(curves[k * other.n + i] - c)).toBeLessThan(1e-13));
	});
	it('draws the last of those by the non-negative way, and says so', () => {
		expect(solve(closeChain(12), first(12)).method).toBe('uniformisation');
	});
	it('gives the slope of its own curve', () => {
		const solution = solve(system, first(5));
		for (const t of [1e-3, 1, 6]) {
			const slope = solution.slope(t);
			const c = solution.at(t);
			const rates = [-c[0], c[0] - 0.8 * c[1], 0.8 * c[1] - 0.5 * c[2], 0.5 * c[2] - 0.3 * c[3], 0.3 * c[3]];
			rates.forEach((rate, i) => expect(slope[i]).toBeCloseTo(rate, 13));
		}
	});
	it('integrates its curve, to the final throughput at t = ∞', () => {
		const solution = solve(system, first(5));
		expect(solution.integral(2)[0]).toBeCloseTo(1 - Math.exp(-2), 14);
		const forever = solution.integral(Infinity);
		expect(Array.from(forever.slice(0, 4))).toEqual([1, 1.25, 2, 1 / 0.3]);
		expect(forever[4]).toBe(Infinity);
		expect(Array.from(solution.at(Infinity))).toEqual([0, 0, 0, 0, 1]);
	});
	it('refuses a negative time, a wrong charge and a loop that multiplies', () => {
		const solution = solve(system, first(5));
		expect(() => solution.at(-1)).toThrow(/time ≥ 0/);
		expect(() => solution.at(NaN)).toThrow(/time ≥ 0/);
		expect(() => solve(system, [1])).toThrow(/1 values for 5 species/);
		expect(() => solve(system, [NaN, 0, 0, 0, 0])).toThrow(/not a finite number/);
		const growing = new SystemBuilder(2)
			.step(0, [[1, 2]], 1)
			.step(1, [[0, 1]], 1)
			.build();
		expect(() => solve(growing, [1, 0])).toThrow(/multiply without limit/);
	});
	it('is not disturbed by solutions made after it', () => {
		const times = Float64Array.from({ length: 100 }, (_, k) => 0.05 * k);
		const before = solve(system, [1, 0, 0, 0, 0]);
		const alone = [...before.curves(times)];
		const other = solve(system, [0, 0, 1, 2, 0]);
		other.curves(times.map((t) => 3 * t));
		expect([...before.curves(times)]).toEqual(alone);
		expect(before.modes).toEqual(solve(system, [1, 0, 0, 0, 0]).modes);
	});
	it('is linear in the charge', () => {
		const a = solve(system, [1, 0, 0, 0, 0]).at(1.5);
		const b = solve(system, [0, 1, 0, 0, 0]).at(1.5);
		const both = solve(system, [2, 3, 0, 0, 0]).at(1.5);
		both.forEach((c, i) => expect(c).toBeCloseTo(2 * a[i] + 3 * b[i], 13));
	});
});
