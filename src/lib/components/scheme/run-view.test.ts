import { describe, expect, it } from 'vitest';
import { runContent } from '$lib/schemas/run';
import { chargeOf, pointsOf, sampleTimes } from './run-view';

const run = runContent.parse({
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 500, unit: 'mmol/L' }, B: { fit: true } },
	excess: { N: { value: 4, unit: 'mol/L' } },
	timeUnit: 'min',
	channels: [
		{ id: 'A', weights: { A: 1 }, unit: 'mmol/L' },
		{ id: 'sum', weights: { A: 1, B: 1 }, unit: 'mmol/L' },
		{ id: 'C', weights: { C: 1 }, unit: 'area %' }
	],
	timepoints: [
		{ time: 0, values: { A: 500, sum: 500, C: 1 } },
		{ time: 30, values: { A: { below: 2 }, sum: 3 } },
		{ time: 60, values: { A: null } }
	],
	exclusions: [{ index: 0, channel: 'A', reasonCode: 'other', reason: 'vial broken' }]
});

describe('a run on the scheme page', () => {
	it('gives its charge in mol/L, a fitted amount without a guess as nothing known', () => {
		expect(chargeOf(run)).toEqual({ A: 0.5, B: 0, N: 4 });
	});
	it('gives sample times in seconds, without time zero', () => {
		expect(sampleTimes(run)).toEqual([1800, 3600]);
	});
	it('gives points of single species in the axes’ units, limits and exclusions marked, and nothing of area %', () => {
		const points = pointsOf(run, 'h');
		expect([...points.keys()]).toEqual(['A']);
		expect(points.get('A')).toEqual([
			{ x: 0, y: 0.5, excluded: true },
			{ x: 0.5, y: 0.002, below: true }
		]);
	});
});
