import { describe, expect, it } from 'vitest';
import { extent, roundUp, spreadLabels, valueAt } from './geometry';

describe('labels at the end of lines', () => {
	it('stay where they are when there is room', () => {
		expect(spreadLabels([10, 60, 200], 16, 0, 300)).toEqual([10, 60, 200]);
	});
	it('move apart evenly about their common place when they would overlap', () => {
		const [a, b] = spreadLabels([100, 104], 16, 0, 300);
		expect(b - a).toBeCloseTo(16);
		expect((a + b) / 2).toBeCloseTo(102);
	});
	it('keep the order of the lines and the order of the answer', () => {
		const placed = spreadLabels([50, 48, 49, 47], 10, 0, 100);
		expect(placed[3]).toBeLessThan(placed[1]);
		expect(placed[1]).toBeLessThan(placed[2]);
		expect(placed[2]).toBeLessThan(placed[0]);
		const sorted = [...placed].sort((p, q) => p - q);
		for (let i = 1; i < 4; i++) expect(sorted[i] - sorted[i - 1]).toBeGreaterThanOrEqual(10 - 1e-9);
	});
	it('stay inside the plot', () => {
		const placed = spreadLabels([298, 299, 300], 16, 0, 300);
		expect(Math.max(...placed)).toBeLessThanOrEqual(300);
		expect(Math.min(...spreadLabels([0, 1, 2], 16, 0, 300))).toBeGreaterThanOrEqual(0);
	});
	it('take an empty list', () => {
		expect(spreadLabels([], 16, 0, 300)).toEqual([]);
	});
});

describe('reading a curve', () => {
	it('interpolates between grid points and hits them exactly', () => {
		expect(valueAt([0, 1, 3], [0, 10, 30], 1)).toBe(10);
		expect(valueAt([0, 1, 3], [0, 10, 30], 2)).toBe(20);
		expect(valueAt([0, 1, 3], [0, 10, 30], 3)).toBe(30);
	});
	it('knows nothing outside the grid', () => {
		expect(valueAt([0, 1], [1, 2], -0.1)).toBeNaN();
		expect(valueAt([0, 1], [1, 2], 1.1)).toBeNaN();
		expect(valueAt([], [], 0)).toBeNaN();
	});
	it('finds the extent, for a logarithmic axis of positive values alone', () => {
		expect(
			extent([
				[0, 2],
				[5, Number.NaN]
			])
		).toEqual([0, 5]);
		expect(extent([[-1, 0, 0.5]], true)).toEqual([0.5, 0.5]);
		expect(extent([[]])).toBeNull();
	});
	it('rounds an axis end up', () => {
		expect(roundUp(0.47)).toBeCloseTo(0.5);
		expect(roundUp(0.5)).toBeCloseTo(0.5);
		expect(roundUp(11)).toBeCloseTo(12);
		expect(roundUp(0)).toBe(1);
	});
});
