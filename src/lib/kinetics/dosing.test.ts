import { describe, expect, it } from 'vitest';
import { runDosing, type DosingPlan } from './dosing';
import { integrate } from './dormand-prince';
import { chain, system } from './test-systems';

const plan = (more: Partial<DosingPlan> = {}): DosingPlan => ({
	startMol: [0, 0, 0],
	startLitres: 10,
	feeds: [],
	shots: [],
	...more
});

describe('dosing', () => {
	it('gives the accumulation (1 − e^{−kt})/(kt) at the end of a constant feed', () => {
		for (const [k, hours, expected] of [
			[1.5, 2, 0.317],
			[1.5, 4, 0.166],
			[0.4, 2, 0.688],
			[1.3, 2, 0.356]
		]) {
			const feed = { startS: 0, endS: hours, molPerS: [1, 0], litresPerS: 0.1 };
			const solution = runDosing(chain([k]), plan({ startMol: [0, 0], feeds: [feed] }));
			expect(solution.accumulation(0, hours)).toBeCloseTo(expected, 3);
			expect(solution.accumulation(0, hours)).toBeCloseTo((1 - Math.exp(-k * hours)) / (k * hours), 13);
		}
	});

	it('keeps amounts and volume through feeds and shots, against a direct integration', () => {
		const reversible = system(3, [
			[0, 1, 1.1],
			[1, 0, 0.3],
			[1, 2, 0.2]
		]);
		const solution = runDosing(
			reversible,
			plan({
				startMol: [2, 0, 0],
				feeds: [
					{ startS: 1, endS: 3, molPerS: [0.5, 0, 0], litresPerS: 0.2 },
					{ startS: 2, endS: 5, molPerS: [0, 0.1, 0], litresPerS: 0 }
				],
				shots: [
					{ timeS: 0, mol: [0, 0.5, 0], litres: 1 },
					{ timeS: 4, mol: [1, 0, 0], litres: 0.5 }
				]
			})
		);
		expect(solution.breaksS).toEqual([1, 2, 3, 4, 5]);
		let y: Float64Array = Float64Array.from([2, 0.5, 0]);
		for (let from = 0; from < 7; from++) {
			if (from === 4) y[0] += 1;
			y = integrate(
				(_, c, dc) => {
					dc[0] = -1.1 * c[0] + 0.3 * c[1] + (from === 1 || from === 2 ? 0.5 : 0);
					dc[1] = 1.1 * c[0] - 0.5 * c[1] + (from >= 2 && from < 5 ? 0.1 : 0);
					dc[2] = 0.2 * c[1];
				},
				y,
				[1],
				{ relative: 1e-12, absolute: 1e-14 }
			);
			if (from === 3) continue; // the shot at 4 counts from its time on
			solution.amountsAt(from + 1).forEach((mol, i) => expect(mol).toBeCloseTo(y[i], 10));
		}
		expect(solution.volumeAt(0)).toBe(11);
		expect(solution.volumeAt(7)).toBeCloseTo(11.9, 12);
		const added = solution.addedBy(7).reduce((a, b) => a + b, 0);
		expect(solution.amountsAt(7).reduce((a, b) => a + b, 0)).toBeCloseTo(added, 12);
		expect(solution.at(7)[0]).toBeCloseTo(solution.amountsAt(7)[0] / 11.9, 14);
	});

	it('names the entry that cannot be used', () => {
		expect(() => runDosing(chain([1, 1]), plan({ startLitres: 0 }))).toThrow(/volume above 0/);
		expect(() =>
			runDosing(chain([1, 1]), plan({ feeds: [{ startS: 2, endS: 1, molPerS: [1, 0, 0], litresPerS: 0 }] }))
		).toThrow(/Feed 1/);
	});
});
