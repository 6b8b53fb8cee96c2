import { describe, expect, it } from 'vitest';
import { mergeMinima } from './determinant-fit';

const found = (x: number[], value: number, starts: number, firstStart: number) => ({
	minimum: {
		x: Float64Array.from(x),
		value,
		converged: true,
		optimality: 0,
		activeBounds: [0, 0]
	} as unknown as Parameters<typeof mergeMinima>[0][0]['minimum'],
	starts,
	firstStart
});
const box = { from: Float64Array.of(-5, -5), to: Float64Array.of(5, 5) };

describe('minima of the determinant that were followed to their ends', () => {
	it('count once where they came to the same place, with the starts of both; others stay apart', () => {
		const merged = mergeMinima(
			[found([0.3, 1], -24.576, 1, 4), found([0.3, 1.0000001], -24.576, 13, 0), found([2, 1], -20, 5, 7)],
			box
		);
		expect(merged.map((f) => [f.minimum.x[0], f.starts, f.firstStart])).toEqual([
			[0.3, 14, 0],
			[2, 5, 7]
		]);
	});
});
