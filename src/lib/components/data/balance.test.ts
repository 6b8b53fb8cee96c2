import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import type { RunContent } from '$lib/schemas/run';
import { balanceOf, balanceTrend, trendWords } from './balance';

const rows = readFileSync('tests/fixtures/s01_clean_50C.csv', 'utf8')
	.trim()
	.split(/\r?\n/)
	.slice(1)
	.map((line) => line.split(',').map(Number));

const run = (over: Partial<RunContent> = {}): RunContent => ({
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 500, unit: 'mmol/L' } },
	excess: {},
	timeUnit: 'h',
	channels: ['A', 'B', 'C'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
	timepoints: rows.map(([time, A, B, C]) => ({ time, values: { A, B, C } })),
	...over
});

describe('the mass balance of a run', () => {
	it('of the invented run at 50 °C lies between 97.2 and 101.6 % of the charge (computed beforehand)', () => {
		const balance = balanceOf(run())!;
		expect(balance.lowest).toBeCloseTo(97.2, 6);
		expect(balance.highest).toBeCloseTo(101.6, 6);
		expect(balance.basis).toBe('the charge');
	});
	it('is counted from the first complete row where the charge is to be fitted', () => {
		const balance = balanceOf(run({ initial: { A: { fit: true } } }))!;
		expect(balance.basis).toBe('the first complete row');
		expect(balance.rows[0].percent).toBe(100);
	});
	it('is not made of area % or of co-eluting peaks', () => {
		const area = ['A', 'B'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'area %' }));
		expect(balanceOf(run({ channels: area }))).toBeNull();
		const both: RunContent['channels'] = [
			{ id: 'A', weights: { A: 1, B: 1 }, unit: 'mol/L' },
			{ id: 'C', weights: { C: 1 }, unit: 'mol/L' }
		];
		expect(balanceOf(run({ channels: both }))).toBeNull();
	});
	it('leaves out rows with a missing value', () => {
		const timepoints = [
			{ time: 0, values: { A: 0.5, B: null, C: 0 } },
			{ time: 1, values: { A: 0.2, B: 0.2, C: { below: 0.01 } } }
		];
		expect(balanceOf(run({ timepoints }))!.rows).toEqual([{ index: 1, time: 1, percent: 81 }]);
	});
});

describe('the trend of the mass balance', () => {
	const drifting = (perHour: number) =>
		balanceOf(
			run({
				timepoints: [0, 1, 2, 3, 4].map((time, i) => {
					const total = 0.5 * (1 + (perHour * time) / 100) + [0.0002, -0.0003, 0.0001, -0.0001, 0.0001][i];
					return { time, values: { A: total - 0.2, B: 0.15, C: 0.05 } };
				})
			})
		)!;
	it('is pointed out where its interval leaves out zero, with what it looks like', () => {
		const climbing = balanceTrend(drifting(1.5))!;
		expect(climbing.slope.value).toBeCloseTo(1.5, 1);
		expect(climbing.slope.low).toBeGreaterThan(0);
		expect(trendWords(climbing, 'h')).toContain('Evaporation');
		expect(trendWords(balanceTrend(drifting(-1.5)), 'h')).toContain('not seen, or a loss');
	});
	it('is none where the interval holds zero, and not to be had from two rows', () => {
		expect(trendWords(balanceTrend(drifting(0)), 'h')).toContain('no trend beyond the scatter');
		const two = { ...drifting(0), rows: drifting(0).rows.slice(0, 2) };
		expect(balanceTrend(two)).toBeNull();
	});
	it('draws its line through the middle of the points', () => {
		const balance = drifting(1.5);
		const { line } = balanceTrend(balance)!;
		const mean = balance.rows.reduce((sum, r) => sum + r.percent, 0) / balance.rows.length;
		expect((line.y[0] + line.y[1]) / 2).toBeCloseTo(mean, 9);
	});
});
