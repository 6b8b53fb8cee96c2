import { describe, expect, it } from 'vitest';
import { emptyScheme, type SchemeContent } from '$lib/schemas/scheme';
import * as draft from './draft';
import { firstConditions, simulate, timeGrid } from './simulate';

/** A → B ⇌ C with 0.794, 0.297 and 0.0952 1/h. */
function ringClosure(): SchemeContent {
	let c = emptyScheme();
	for (const id of ['A', 'B', 'C']) c = draft.addSpecies(c, { id, name: '' });
	c = draft.place(draft.place(c, null, 'reactant', 'A'), 's1', 'product', 'B');
	c = draft.place(draft.place(c, null, 'reactant', 'B'), 's2', 'product', 'C');
	c = draft.setConstant(c, 's1', 'forward', { value: 0.794, unit: '1/h' });
	c = draft.setConstant(draft.setReversible(c, 's2', true), 's2', 'forward', { value: 0.297, unit: '1/h' });
	return draft.setConstant(c, 's2', 'reverse', { value: 0.0952, unit: '1/h' });
}

describe('the live curves', () => {
	it('begin from half a mole of what the scheme starts with', () => {
		expect(firstConditions(ringClosure(), 'h').charge).toEqual({ A: 0.5 });
	});
	it('find the maximum of the intermediate on the closed form', () => {
		const content = ringClosure();
		const { peaks, spanS } = simulate(content, firstConditions(content, 'h'));
		expect(peaks.map((p) => p.species)).toEqual(['B']);
		// From B = 0.121367 + 0.748220 e^(−0.3922 t) − 0.869587 e^(−0.794 t), the two-exponential solution of the rate
		// equations: t = ln(0.869587 · 0.794 / (0.748220 · 0.3922)) / (0.794 − 0.3922) = 2.129498 h, B = 0.285615 mol/L.
		expect(peaks[0].timeS / 3600).toBeCloseTo(2.129498, 5);
		expect(peaks[0].molPerL).toBeCloseTo(0.285615, 5);
		expect(spanS / 3600).toBeCloseTo(12, 6);
	});
	it('stop at what stops the engine, and say so', () => {
		const content = draft.setConstant(ringClosure(), 's1', 'forward', { value: -1, unit: '1/h' });
		const { solution, issues } = simulate(content, firstConditions(content, 'h'));
		expect(solution).toBeNull();
		expect(issues.some((i) => i.level === 'stop' && i.stepId === 's1')).toBe(true);
	});
	it('take an unfinished step as unfinished, not as a loss', () => {
		const content = draft.place(ringClosure(), null, 'reactant', 'C');
		const { solution, network, issues } = simulate(content, firstConditions(content, 'h'));
		expect(network.steps).toHaveLength(2);
		expect(solution).not.toBeNull();
		expect(issues.some((i) => i.code === 'step-dangling' && i.stepId === 's3')).toBe(true);
	});
	it('have points where fast modes are, in rising order', () => {
		const grid = timeGrid(36_000, 1);
		expect(grid.filter((t) => t < 1).length).toBeGreaterThan(10);
		expect([...grid].every((t, i) => i === 0 || t >= grid[i - 1])).toBe(true);
		expect(grid[grid.length - 1]).toBe(36_000);
	});
});
