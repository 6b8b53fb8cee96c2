import { describe, expect, it } from 'vitest';
import { buildLadder, climb, norm1, NORM_LIMIT, type Matrix } from './ladder';

const at = (matrix: Matrix, charge: number[], time: number, longest = time) =>
	climb(buildLadder(matrix, longest), charge, time).steps.at(-1)!;

describe('the matrix exponential of the sheet "Verify"', () => {
	// A → B ⇌ C with 0.4/0.3/0.1: a defective matrix, exact values computed apart.
	const defective: Matrix = [
		[-0.4, 0, 0],
		[0.4, -0.3, 0.1],
		[0, 0.3, -0.1]
	];
	it('is right where the matrix is defective', () => {
		const found = at(defective, [1, 0, 0], 2.5);
		[Math.exp(-1), 0.43394, 0.19818].forEach((v, i) => expect(found[i]).toBeCloseTo(v, i === 0 ? 13 : 5));
	});
	it('keeps the total of the charge to rounding', () => {
		for (const time of [0, 1e-6, 0.37, 5, 11.999, 12]) {
			const found = at(defective, [0.5, 0, 0], time, 12);
			expect(Math.abs(found.reduce((a, b) => a + b, 0) - 0.5)).toBeLessThan(1e-12);
		}
	});
	it('turns with a loop (complex modes)', () => {
		// A → B → C → A, all 1: e^{-1.5 t} cos(√3/2 t) and its kin; values of the exact solution at t = 1.
		const loop: Matrix = [
			[-1, 0, 1],
			[1, -1, 0],
			[0, 1, -1]
		];
		const exact = 1 / 3 + (2 / 3) * Math.exp(-1.5) * Math.cos(Math.sqrt(3) / 2);
		expect(at(loop, [1, 0, 0], 1)[0]).toBeCloseTo(exact, 13);
	});
	it('gives the charge at time zero, whatever the longest time is', () => {
		expect(at(defective, [0.5, 0.1, 0], 0, 12)).toEqual([0.5, 0.1, 0]);
		expect(at(defective, [0.5, 0.1, 0], 0, 0)).toEqual([0.5, 0.1, 0]);
	});
	it('takes steps that are short enough for the polynomial', () => {
		for (const longest of [1e-3, 1, 12, 4e4]) {
			const ladder = buildLadder(defective, longest);
			expect(norm1(defective) * ladder.stepLength).toBeLessThanOrEqual(NORM_LIMIT * (1 + 1e-12));
		}
	});
});
