import { describe, expect, it } from 'vitest';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import { compareFits, type ComparedFit } from './comparison';

const fit = (id: string, aicc: number, over: Partial<ComparedFit> = {}): ComparedFit => ({
	id,
	number: Number(id),
	report: { status: 'converged', aicc, bic: aicc + 1, pointsUsed: 33 } as FitReport,
	request: { options: { weighting: { model: 'constant' } } } as FitRequest,
	scheme: { name: `Scheme ${id}`, number: 1 },
	runs: [{ name: 'run 1', revisionId: 'a' }],
	...over
});

describe('comparing fits', () => {
	it('weighs fits of the same data by Akaike weights that sum to one', () => {
		const { rows, obstacle, sentence } = compareFits([fit('1', -340), fit('2', -195)]);
		expect(obstacle).toBeNull();
		expect(rows[1].deltaAicc).toBe(145);
		expect(rows[0].akaikeWeight! + rows[1].akaikeWeight!).toBeCloseTo(1, 12);
		expect(sentence).toMatch(/fit 1 .*by 145\.0 in AICc/);
	});
	it('does not name a winner within 2 of each other', () => {
		expect(compareFits([fit('1', 10), fit('2', 11.5)]).sentence).toMatch(/do not tell .* apart/);
	});
	it('gives a difference of 2 ln 2 twice the weight', () => {
		// Burnham & Anderson 2002: the evidence ratio is exp(Δ/2).
		const { rows } = compareFits([fit('1', 0), fit('2', 2 * Math.LN2)]);
		expect(rows[0].akaikeWeight! / rows[1].akaikeWeight!).toBeCloseTo(2, 12);
	});
	it('refuses to weigh fits of different data', () => {
		const other = fit('2', 0, { runs: [{ name: 'run 1', revisionId: 'b' }] });
		const { obstacle, rows } = compareFits([fit('1', 0), other]);
		expect(obstacle).toMatch(/same runs/);
		expect(rows.every((r) => r.akaikeWeight === null)).toBe(true);
	});
	it('refuses to weigh fits with different error models', () => {
		const other = fit('2', 0, {
			request: { options: { weighting: { model: 'proportional' } } } as FitRequest
		});
		expect(compareFits([fit('1', 0), other]).obstacle).toMatch(/error models/);
	});
});
