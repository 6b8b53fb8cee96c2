import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { extremaOf, maximumOn, timeOfMaximum } from './extrema';
import { solve } from './solve';
import { chain, system } from './test-systems';
import { trackOf } from './track';

const reference = <T>(name: string): T =>
	(
		JSON.parse(readFileSync(new URL(`../../../tests/reference/${name}.json`, import.meta.url), 'utf8')) as {
			expected: T;
		}
	).expected;

interface Pair {
	half_lives: string[];
	t_max_daughter: string;
	N2_max_per_N1_0: string;
}

const relative = (found: number, expected: number) => Math.abs(found / expected - 1);

describe('time and height of a maximum', () => {
	it('agrees with Levenspiel ch. 8 for series reactions, equal constants included', () => {
		for (const row of reference<{ rows: Record<string, string>[] }>('c05d_series_max').rows) {
			const found = timeOfMaximum(solve(chain([+row.k1, +row.k2]), [1, 0, 0]), 1);
			expect(found.kind).toBe('interior');
			expect(relative(found.timeS, +row.t_max)).toBeLessThan(2e-13);
			expect(relative(found.value, +row.cR_max_over_cA0)).toBeLessThan(1e-13);
		}
	});

	it('agrees with the Bateman pairs (ICRP 107 half-lives)', () => {
		const expected = reference<Record<string, Pair>>('c05b_bateman_pairs');
		for (const name of ['Ba140_La140', 'Te132_I132', 'Sr90_Y90', 'Mo99_Tc99m']) {
			const pair = expected[name];
			// The file prints the half-life of Sr-90 in h to two decimals: 28.79 y of 365.2422 d is the given value.
			const halfLives = name === 'Sr90_Y90' ? [28.79 * 365.2422 * 24, 64.1] : pair.half_lives.map(Number);
			const [k1, k2] = halfLives.map((h) => Math.LN2 / h);
			const found = timeOfMaximum(solve(chain([k1, k2]), [1, 0, 0]), 1);
			expect(relative(found.timeS, +pair.t_max_daughter)).toBeLessThan(1e-12);
			expect(relative(found.value, +pair.N2_max_per_N1_0)).toBeLessThan(1e-12);
		}
	});

	it('gives 1.980 h and 0.7430 for 1.20 and 0.15 1/h, with the span within 1 %', () => {
		const { timeS, value, withinOnePercent } = timeOfMaximum(solve(chain([1.2, 0.15]), [1, 0, 0]), 1);
		expect(timeS).toBeCloseTo(Math.log(8) / 1.05, 12);
		expect(value).toBeCloseTo(0.743, 4);
		const b = (t: number) => (1.2 / 1.05) * (Math.exp(-0.15 * t) - Math.exp(-1.2 * t));
		for (const t of withinOnePercent) expect(b(t) / value).toBeCloseTo(0.99, 12);
		expect(withinOnePercent[0]).toBeLessThan(timeS);
		expect(withinOnePercent[1]).toBeGreaterThan(timeS);
	});

	it('says when there is no interior maximum', () => {
		const solution = solve(chain([1, 0.5]), [1, 0, 0]);
		expect(timeOfMaximum(solution, 0)).toMatchObject({ kind: 'at start', timeS: 0, value: 1 });
		expect(timeOfMaximum(solution, 2)).toMatchObject({ kind: 'at end', timeS: Infinity, value: 1 });
		expect(extremaOf(solution, 2)).toEqual([]);
		expect(timeOfMaximum(solution, 2, 3)).toMatchObject({ kind: 'at end', timeS: 3 });
		expect(timeOfMaximum(solve(chain([0, 0]), [1, 0, 0]), 0)).toMatchObject({ kind: 'constant', value: 1 });
		expect(timeOfMaximum(solution, [1, 1, 1])).toMatchObject({ kind: 'constant' });
	});

	it('is right for stiff chains, rate ratios to 1e12 in either order', () => {
		for (const [k1, k2] of [
			[1e6, 1e-6],
			[1e-6, 1e6],
			[1, 1e-9],
			[1e-3, 1e3]
		]) {
			const found = timeOfMaximum(solve(chain([k1, k2]), [1, 0, 0]), 1);
			const expected = Math.log(k1 / k2) / (k1 - k2);
			const height = Math.exp((-k2 / (k1 - k2)) * Math.log(k1 / k2));
			// Where the intermediate is short-lived, its maximum is so flat that rounding of the slope moves it by ε k2/k1.
			expect(relative(found.timeS, expected)).toBeLessThan(1e-12 + (1e-15 * k2) / k1);
			expect(relative(found.value, height)).toBeLessThan(1e-12);
		}
	});

	it('finds the maximum of a trace four steps down a chain', () => {
		const solution = solve(chain([1, 2, 3, 4, 5]), [1, 0, 0, 0, 0, 0]);
		for (let i = 1; i < 5; i++) {
			const [only, ...others] = extremaOf(solution, i);
			expect(others).toEqual([]);
			expect(Math.abs(solution.slope(only.timeS)[i])).toBeLessThan(1e-15);
		}
	});
});

describe('several extrema', () => {
	it('finds every turn of an irreversible loop until it is lost in rounding', () => {
		const loop = system(3, [
			[0, 1, 1],
			[1, 2, 1],
			[2, 0, 1]
		]);
		const solution = solve(loop, [1, 0, 0]);
		// A = 1/3 + 2/3 e^{-1.5 t} cos(√¾ t): turns where tan(√¾ t) = −√3, i.e. √¾ t = 2π/3 + mπ.
		const turns = extremaOf(solution, 0, 16);
		const expected = [0, 1, 2, 3].map((m) => ((2 * Math.PI) / 3 + m * Math.PI) / Math.sqrt(0.75));
		expect(turns.length).toBe(4);
		turns.forEach((turn, m) => {
			expect(turn.kind).toBe(m % 2 === 0 ? 'minimum' : 'maximum');
			expect(relative(turn.timeS, expected[m])).toBeLessThan(1e-5);
		});
		expect(relative(turns[0].timeS, expected[0])).toBeLessThan(1e-12);
	});

	it('finds two maxima of a sum that rises twice', () => {
		// A → B → C fast, D → E → F slow: B + E has a maximum of each kind.
		const solution = solve(
			system(6, [
				[0, 1, 10],
				[1, 2, 5],
				[3, 4, 0.04],
				[4, 5, 0.01]
			]),
			[1, 0, 0, 1, 0, 0]
		);
		const turns = extremaOf(solution, [0, 1, 0, 0, 1, 0]);
		expect(turns.map((t) => t.kind)).toEqual(['maximum', 'minimum', 'maximum']);
		const best = maximumOn(trackOf(solution), [0, 1, 0, 0, 1, 0]);
		expect(best.timeS).toBeCloseTo(Math.log(4) / 0.03, 0);
	});
});
