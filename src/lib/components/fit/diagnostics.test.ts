import { describe, expect, it } from 'vitest';
import { fitRequest, type FitReport, type FitResidual } from '$lib/schemas/fit';
import {
	largeRows,
	normalScores,
	residualPlot,
	roundTicks,
	sheetRowWords,
	type DiagnosticContext
} from './diagnostics';

const residual = (over: Partial<FitResidual>): FitResidual => ({
	run: 'r1',
	channel: 'A',
	index: 0,
	time: 1,
	timeUnit: 'h',
	observed: 1,
	predicted: 1,
	residual: 0,
	sigma: 1,
	studentised: 0,
	leverage: 0.1,
	...over
});

const run = (id: string) => ({
	id,
	temperature: { value: 40, unit: 'degC' },
	initial: {},
	timeUnit: 'h',
	channels: ['A', 'B'].map((c) => ({ id: c, weights: { [c]: 1 }, unit: 'mol/L' })),
	timepoints: []
});

const context: DiagnosticContext = {
	request: fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B', series: 4 }],
		steps: [],
		referenceTemperature: { value: 40, unit: 'degC' },
		runs: [run('r1'), run('r2')]
	}),
	runNames: { r1: 'Run 1', r2: 'Run 2' },
	hrefOf: (r, row) => `/${r}/${row}`
};

const report = (residuals: FitResidual[]) => ({ residuals }) as FitReport;

describe('residual plots', () => {
	it('mark what lies beyond three and say where it is', () => {
		const found = report([
			residual({ studentised: 1 }),
			residual({ channel: 'B', run: 'r2', time: 0.5, index: 4, studentised: -3.4 }),
			residual({ studentised: null })
		]);
		const { points, legend } = residualPlot(found, 'time', context);
		expect(points.map((p) => p.large)).toEqual([false, true]);
		expect(points[1]).toMatchObject({ x: 0.5, index: 4, href: '/r2/5' });
		expect(points[1].words).toBe('B, Run 2, 0.5 h: studentised residual −3.4');
		expect(legend).toEqual([
			{ label: 'A', index: 0 },
			{ label: 'B', index: 4 }
		]);
		expect(largeRows(found).map((r) => r.index)).toEqual([4]);
	});

	it('lead to the row of the sheet that the page of the run shows', () => {
		const [first, second] = context.request.runs;
		const values = { A: 0.4, B: 0.1 };
		const at = { time: 1, values, source: { sheet: 'Run 2', row: 17 } };
		const request = { ...context.request, runs: [first, { ...second, timepoints: [at] }] };
		const found = report([residual({ run: 'r2', studentised: 3.2 })]);
		expect(residualPlot(found, 'time', { ...context, request }).points[0].href).toBe('/r2/17');
	});

	it('lead to the column, and name it as one, where the times of the sheet run across', () => {
		const [first, second] = context.request.runs;
		const at = { time: 1, values: { A: 0.4 }, source: { sheet: 'Run 2', row: 3, column: 5 } };
		const request = { ...context.request, runs: [first, { ...second, timepoints: [at] }] };
		const found = report([residual({ run: 'r2', studentised: 3.2 })]);
		expect(residualPlot(found, 'time', { ...context, request }).points[0].href).toBe('/r2/5');
		expect(sheetRowWords(request, 'r2', 0)).toBe('column E');
		expect(sheetRowWords({ ...request, runs: context.request.runs }, 'r2', 4)).toBe('row 5');
	});

	it('put runs in different time units on one axis', () => {
		const found = report([residual({ time: 30, timeUnit: 'min' }), residual({ time: 2, timeUnit: 'h' })]);
		expect(residualPlot(found, 'time', context).points.map((p) => p.x)).toEqual([0.5, 2]);
	});

	it('keep the points of one run or species around its place', () => {
		const found = report([
			residual({}),
			residual({ channel: 'B' }),
			residual({ run: 'r2' }),
			residual({ run: 'r2', channel: 'B' })
		]);
		const byRun = residualPlot(found, 'run', context);
		expect(byRun.categories).toEqual(['Run 1', 'Run 2']);
		expect(byRun.points.map((p) => Math.abs(Math.round(p.x)))).toEqual([0, 0, 1, 1]);
		expect(residualPlot(found, 'species', context).points.map((p) => Math.abs(Math.round(p.x)))).toEqual([
			0, 1, 0, 1
		]);
	});

	it('rank against normal scores', () => {
		// Normal scores of five values by the formula Φ⁻¹((i − 3/8)/(n + 1/4)): Φ⁻¹(0.119048) = −1.1798.
		const scores = normalScores(5);
		expect(scores[0]).toBeCloseTo(-1.1798, 4);
		expect(scores[2]).toBeCloseTo(0, 12);
		const found = report([2, -1, 0.5, -0.2, 1].map((studentised) => residual({ studentised })));
		const { points } = residualPlot(found, 'normal', context);
		expect(points[0].x).toBeCloseTo(scores[4], 12);
		expect(points[1].x).toBeCloseTo(scores[0], 12);
	});
});

describe('marks of an axis', () => {
	it('are round and inside', () => {
		expect(roundTicks(-3.2, 3.4)).toEqual([-2, 0, 2]);
		expect(roundTicks(0, 0.47)).toEqual([0, 0.1, 0.2, 0.3, 0.4]);
		expect(roundTicks(2, 2)).toEqual([2]);
	});
});
