import { describe, expect, it } from 'vitest';
import { rateUnit } from '$lib/kinetics/units';
import { emptyScheme, schemeContent, type SchemeContent } from '$lib/schemas/scheme';
import * as draft from './draft';

function abc(): SchemeContent {
	let c = emptyScheme();
	for (const id of ['A', 'B', 'C']) c = draft.addSpecies(c, { id, name: '' });
	c = draft.place(c, null, 'reactant', 'A');
	c = draft.place(c, 's1', 'product', 'B');
	c = draft.place(c, null, 'reactant', 'B');
	return draft.place(c, 's2', 'product', 'C');
}

describe('a scheme while it is drawn', () => {
	it('is always one that the schema takes', () => {
		let c = abc();
		c = draft.setReversible(c, 's2', true);
		c = draft.setReverseForm(c, 's2', 'equilibrium');
		c = draft.setEnergy(c, 's1', 'forward', { value: 72, unit: 'kJ/mol' });
		c = draft.setEnergy(c, 's1', 'forward', null);
		c = draft.takeOut(c, 's1', 'reactant', 'A');
		expect(schemeContent.parse(c)).toEqual(c);
		expect(c.steps[0].forward).not.toHaveProperty('activationEnergy');
	});
	it('gives each species a colour of its own and keeps it when another leaves', () => {
		let c = abc();
		expect(c.species.map((s) => s.series)).toEqual([0, 1, 2]);
		c = draft.removeSpecies(c, 'B');
		c = draft.addSpecies(c, { id: 'D', name: '' });
		expect(c.species.map((s) => [s.id, s.series])).toEqual([
			['A', 0],
			['C', 2],
			['D', 1]
		]);
	});
	it('counts a product that is dropped twice: A → 2 B', () => {
		const c = draft.place(abc(), 's1', 'product', 'B');
		expect(c.steps[0].products).toEqual([{ species: 'B', coefficient: 2 }]);
	});
	it('moves a chip from one place to another, and a step left empty goes', () => {
		let c = draft.place(abc(), null, 'reactant', 'C');
		expect(c.steps).toHaveLength(3);
		c = draft.move(c, 'C', { stepId: 's3', side: 'reactant' }, { stepId: 's1', side: 'product' });
		expect(c.steps).toHaveLength(2);
		expect(c.steps[0].products.map((p) => p.species)).toEqual(['B', 'C']);
	});
	it('leaves everything as it was when a chip is dropped where it came from', () => {
		const c = abc();
		const here = { stepId: 's1', side: 'reactant' } as const;
		expect(draft.move(c, 'A', here, here)).toBe(c);
	});
	it('carries a new symbol through steps and rate laws', () => {
		let c = draft.addSpecies(abc(), { id: 'N', name: 'amine', role: 'reagent in excess' });
		c = draft.setExcess(c, 's1', 'forward', 'N', 1, rateUnit);
		expect(c.steps[0].forward.kRef.unit).toBe('L/(mol h)');
		c = draft.editSpecies(c, 'N', { ...c.species[3], id: 'Am' });
		c = draft.editSpecies(c, 'A', { ...c.species[0], id: 'SM' });
		expect(c.steps[0].reactant).toBe('SM');
		expect(c.steps[0].forward.excess).toEqual([{ species: 'Am', order: 1 }]);
		c = draft.setExcess(c, 's1', 'forward', 'Am', null, rateUnit);
		expect(c.steps[0].forward).toEqual({ kRef: { value: 0.5, unit: '1/h' } });
	});
	it('takes a species out of every step with it', () => {
		const c = draft.removeSpecies(abc(), 'B');
		expect(c.steps.map((s) => [s.reactant, s.products.map((p) => p.species)])).toEqual([
			['A', []],
			['', ['C']]
		]);
		expect(draft.stepsNaming(abc(), 'B').map((s) => s.id)).toEqual(['s1', 's2']);
	});
	it('keeps the numbers when the reverse direction changes its form', () => {
		let c = draft.setReversible(abc(), 's2', true);
		c = draft.setConstant(c, 's2', 'forward', { value: 0.297, unit: '1/h' });
		c = draft.setConstant(c, 's2', 'reverse', { value: 0.0952, unit: '1/h' });
		c = draft.setReverseForm(c, 's2', 'equilibrium');
		expect(c.steps[1].reverse).toEqual({ equilibriumConstant: { value: 3.12, unit: '1' } });
		c = draft.setReverseForm(c, 's2', 'constant');
		expect(c.steps[1].reverse).toEqual({ kRef: { value: 0.09519, unit: '1/h' } });
	});
	it('marks a loss as meant, and takes the mark away once a product is there', () => {
		let c = draft.setLoss(abc(), 's2', true);
		expect(c.steps[1]).toMatchObject({ products: [], loss: true, reverse: null });
		c = draft.place(c, 's2', 'product', 'C');
		expect(c.steps[1]).not.toHaveProperty('loss');
	});
	it('says what differs between two versions', () => {
		const mine = abc();
		const theirs = draft.setConstant(draft.removeSpecies(mine, 'C'), 's1', 'forward', {
			value: 2,
			unit: '1/h'
		});
		expect(draft.differences(mine, theirs).map((d) => d.label)).toEqual(['species C', 'step 1', 'step 2']);
		expect(draft.differences(mine, mine)).toEqual([]);
		expect(draft.stepWords(mine.steps[0])).toBe('A → B (0.5 1/h)');
	});
});
