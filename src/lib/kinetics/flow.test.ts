import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { bestResidence } from './best-residence';
import { plugFlow, stirredTank, tanksInSeries } from './flow';
import { segregatedFlow } from './residence-table';
import { chain, system } from './test-systems';
import type { LinearSystem } from './types';

const series = chain([1.2, 0.15]);
const feed = [1, 0, 0];
/** Reversible, branched, with 2:1 stoichiometry and a loss. */
const wide = (k: number[]): LinearSystem =>
	system(4, [
		[0, 1, k[0]],
		[1, 0, k[1]],
		[1, 2, k[2], 2],
		[2, 3, k[3]],
		[0, -1, k[4]]
	]);
const constants = [1.5, 0.4, 0.7, 0.2, 0.1];

describe('tanks and plug flow', () => {
	it('gives the best residence times and heights of the domain table for k 1.20 and 0.15', () => {
		for (const [count, height, tau] of [
			[Infinity, 0.743, 1.98],
			[1, 0.5458, 2.357],
			[2, 0.6297, 2.222],
			[3, 0.6637, 2.158],
			[10, 0.7175, 2.043]
		]) {
			const { residenceS, value } = bestResidence(series, feed, 1, count);
			expect(Math.abs(value - height)).toBeLessThan(6e-5);
			expect(Math.abs(residenceS - tau)).toBeLessThan(6e-4);
		}
	});

	it('agrees with Levenspiel ch. 8 for one mixed-flow reactor', () => {
		const { expected } = JSON.parse(
			readFileSync(new URL('../../../tests/reference/c05d_series_max.json', import.meta.url), 'utf8')
		) as { expected: { rows: Record<string, string>[] } };
		for (const row of expected.rows) {
			const found = stirredTank(chain([+row.k1, +row.k2]), feed, +row.tau_opt_CSTR);
			expect(found[1] / +row.cR_max_CSTR).toBeCloseTo(1, 13);
			expect(bestResidence(chain([+row.k1, +row.k2]), feed, 1, 1).residenceS / +row.tau_opt_CSTR).toBeCloseTo(
				1,
				6
			);
		}
	});

	it('solves (I − τK) c = c₀ for a branched reversible scheme', () => {
		const [k1, k2, k3, k4, k5] = constants;
		const tau = 1.7;
		const c = stirredTank(wide(constants), [1, 0.2, 0, 0], tau);
		expect(c[0] - tau * (-(k1 + k5) * c[0] + k2 * c[1])).toBeCloseTo(1, 13);
		expect(c[1] - tau * (k1 * c[0] - (k2 + k3) * c[1])).toBeCloseTo(0.2, 13);
		expect(c[2] - tau * (2 * k3 * c[1] - k4 * c[2])).toBeCloseTo(0, 13);
		expect(c[3] - tau * k4 * c[2]).toBeCloseTo(0, 13);
	});

	it('tends to plug flow with many tanks, and to the feed without time', () => {
		const plug = plugFlow(series, feed, 2);
		tanksInSeries(series, feed, 2, 20_000).forEach((c, i) => expect(c).toBeCloseTo(plug[i], 4));
		expect([...stirredTank(series, feed, 0)]).toEqual(feed);
	});
});

describe('a residence-time distribution given as a table', () => {
	it('is exact for straight lines: A under a triangular distribution', () => {
		const k = 0.8;
		const table = { timesS: [0.5, 1.5, 4], density: [0, 2, 0] };
		const { outlet, area, meanResidenceS } = segregatedFlow(chain([k]), [1, 0], table);
		// ∫ (a + b t) e^{−kt} dt in closed form on both sides.
		const side = (a: number, b: number, from: number, to: number) => {
			const f = (t: number) => -Math.exp(-k * t) * ((a + b * t) / k + b / k ** 2);
			return f(to) - f(from);
		};
		const expected = (side(-1, 2, 0.5, 1.5) + side(3.2, -0.8, 1.5, 4)) / 3.5;
		expect(area).toBeCloseTo(3.5, 14);
		expect(meanResidenceS).toBeCloseTo((0.5 + 1.5 + 4) / 3, 14);
		expect(outlet[0]).toBeCloseTo(expected, 14);
		expect(outlet[0] + outlet[1]).toBeCloseTo(1, 14);
	});

	it('gives a stirred tank from its exponential distribution, tabulated finely', () => {
		const tau = 2.357;
		const timesS = Array.from({ length: 1500 }, (_, i) => 40 * tau * (i / 1499) ** 2);
		const density = timesS.map((t) => Math.exp(-t / tau) / tau);
		const { outlet } = segregatedFlow(series, feed, { timesS, density });
		stirredTank(series, feed, tau).forEach((c, i) => expect(outlet[i]).toBeCloseTo(c, 4));
	});

	it('names what is wrong with a table', () => {
		expect(() => segregatedFlow(series, feed, { timesS: [0, 1, 1], density: [1, 1, 1] })).toThrow(/Row 3/);
		expect(() => segregatedFlow(series, feed, { timesS: [0, 1], density: [0, 0] })).toThrow(/no area/);
	});
});
