import { describe, expect, it } from 'vitest';
import type { SchemeContent, StepContent } from '$lib/schemas/scheme';
import { materialRows } from './material-rows';
import { simulate } from './simulate';

const step = (id: string, from: string, to: string[], k: number, back?: number): StepContent => ({
	id,
	reactant: from,
	products: to.map((species) => ({ species, coefficient: 1 })),
	forward: { kRef: { value: k, unit: '1/h' } },
	reverse: back ? { kRef: { value: back, unit: '1/h' } } : null,
	...(to.length ? {} : { loss: true })
});
const scheme = (steps: StepContent[]): SchemeContent => ({
	species: ['A', 'B', 'C'].map((id) => ({ id, name: '' })),
	steps,
	referenceTemperature: { value: 25, unit: 'degC' }
});
const rows = (content: SchemeContent, span: number | null = null) =>
	materialRows(
		content,
		simulate(content, { charge: { A: 0.5 }, temperature: { value: 25, unit: 'degC' }, span, timeUnit: 'h' })
	);

describe('the material map', () => {
	it('shares a charge between two steps as their constants', () => {
		const found = rows(scheme([step('s1', 'A', ['B'], 3), step('s2', 'A', ['C'], 1)]));
		expect(found[0].final).toBeCloseTo(75, 9);
		expect(found[1].final).toBeCloseTo(25, 9);
	});
	it('counts what has gone through by the end of the span that is shown', () => {
		const [only] = rows(scheme([step('s1', 'A', ['B'], Math.LN2)]), 1);
		expect(only.shown).toBeCloseTo(50, 9);
		expect(only.final).toBeCloseTo(100, 9);
	});
	it('nets out what comes back', () => {
		const [only] = rows(scheme([step('s1', 'A', ['B'], 3, 1)]));
		expect(only.words).toBe('A ⇌ B');
		expect(only.final).toBeCloseTo(75, 9);
	});
	it('shows a loss, and nothing without a charge', () => {
		expect(rows(scheme([step('s1', 'A', [], 1)]))[0].words).toBe('A → not assayed');
		const content = scheme([step('s1', 'A', ['B'], 1)]);
		const view = { charge: {}, temperature: { value: 25, unit: 'degC' }, span: null, timeUnit: 'h' };
		expect(materialRows(content, simulate(content, view))).toEqual([]);
	});
});
