import { describe, expect, it } from 'vitest';
import { fitRequest, type FitReport } from '$lib/schemas/fit';
import { countWords, eliminatedWords, errorModelWords, searchWords } from './record-words';

const request = (options: object = {}, initial: object = { value: 0.5, unit: 'mol/L' }) =>
	fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B' }],
		steps: [
			{
				id: 's1',
				reactant: 'A',
				products: [{ species: 'B' }],
				forward: { kRef: { value: 1, unit: '1/h' } },
				reverse: null
			}
		],
		referenceTemperature: { value: 50, unit: 'degC' },
		runs: [
			{
				id: 'r1',
				temperature: { value: 50, unit: 'degC' },
				initial: { A: initial },
				timeUnit: 'h',
				channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
				timepoints: [0, 1, 2].map((time) => ({ time, values: { A: 0.2 } }))
			}
		],
		options
	});
const report = {
	status: 'converged',
	pointsUsed: 33,
	pointsCensored: 2,
	degreesOfFreedom: 30,
	startsRun: 20,
	startsConverged: 19,
	seed: 1,
	evaluations: 412,
	optimality: 2.34e-9,
	parameters: [{ id: 's1.forward.kRef', state: 'at bound' }]
} as unknown as FitReport;

describe('what is on record of a fit', () => {
	it('states the error model, with the parts of each column', () => {
		expect(errorModelWords(request())).toMatch(/^constant/);
		const weighting = { model: 'combined', perChannel: { A: { a: 0.002, b: 0.015 } } };
		expect(errorModelWords(request({ weighting }))).toBe(
			'combined: variance a² + (b·y)²; A: a 0.002 mol/L, b 1.5 %'
		);
		expect(errorModelWords(request({ criterion: 'determinant' }))).toMatch(/determinant criterion/);
	});

	it('says how the row at time zero and values at a limit count', () => {
		expect(countWords(report, request())).toBe(
			'33 values; 2 at a limit, which count where the curve crosses it; the row at time zero not counted; 30 degrees of freedom'
		);
		expect(countWords(report, request({}, { fit: true }))).toMatch(/time zero counted/);
		expect(countWords(report, request({ useTimeZeroRow: true }))).toMatch(/time zero counted/);
	});

	it('names what was eliminated from the search', () => {
		const eliminated = { ...report, eliminated: ['r1.initial.A'] };
		expect(eliminatedWords(eliminated, request(), { r1: 'Run 1' })).toMatch(
			/^A₀ \(charge, Run 1\) enters linearly and was eliminated .*Golub & Pereyra 1973/
		);
		expect(eliminatedWords(report, request(), {})).toBeNull();
	});

	it('gives status, effort and bounds of the search', () => {
		expect(searchWords(report, request(), {})).toBe(
			'converged, 19 of 20 starts settled, seed 1, 412 evaluations, gradient at the end 2.3e−9, at a bound: k₁'
		);
	});
});
