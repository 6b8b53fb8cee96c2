import { describe, expect, it } from 'vitest';
import { linearSystem, rateConstants, solve, toNetwork } from '$lib/kinetics';
import { emptyScheme, type SchemeContent } from '$lib/schemas/scheme';
import * as draft from './draft';
import { inWords, modeWords, stepSentence } from './sentences';

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

function solved(content: SchemeContent) {
	const { network } = toNetwork(content, { emptyProducts: 'unfinished' });
	const constants = rateConstants(network, { temperatureK: 298.15, excessMolPerL: {} });
	const system = linearSystem(network, constants);
	return { network, constants, system };
}

describe('rate constants in words', () => {
	it('say the half-life of a forward step', () => {
		const { network, constants, system } = solved(ringClosure());
		// ln 2 / 0.794 h = 0.873 h = 52.4 min
		expect(stepSentence(network, network.steps[0], constants, system)).toBe('Half of A is gone in 52 min.');
	});
	it('say where a reversible step settles and how fast', () => {
		const { network, constants, system } = solved(ringClosure());
		// 0.297 / 0.0952 = 3.12; ln 2 / 0.3922 h = 1.77 h
		expect(stepSentence(network, network.steps[1], constants, system)).toBe(
			'Settles at C / B = 3.12, half the way in 1.77 h.'
		);
	});
	it('say the share of a step that is not the only way out', () => {
		let c = draft.place(draft.place(ringClosure(), null, 'reactant', 'A'), 's3', 'product', 'C');
		c = draft.setConstant(c, 's3', 'forward', { value: 0.794, unit: '1/h' });
		const { network, constants, system } = solved(c);
		expect(stepSentence(network, network.steps[0], constants, system)).toContain(
			'it takes 50.0 % of what leaves A'
		);
	});
	it('tell a loss from a step, and a constant of zero from a slow one', () => {
		let c = draft.setLoss(draft.place(emptyScheme(), null, 'reactant', 'A'), 's1', true);
		c = draft.addSpecies(c, { id: 'A', name: '' });
		c = draft.setConstant(c, 's1', 'forward', { value: 1, unit: '1/s' });
		const one = solved(c);
		expect(stepSentence(one.network, one.network.steps[0], one.constants, one.system)).toBe(
			'Half of A is lost in 693 ms.'
		);
		const none = solved(draft.setConstant(c, 's1', 'forward', { value: 0, unit: '1/s' }));
		expect(stepSentence(none.network, none.network.steps[0], none.constants, none.system)).toContain('zero');
	});
	it('list names as people do', () => {
		expect([inWords([]), inWords(['A']), inWords(['A', 'B']), inWords(['A', 'B', 'C'])]).toEqual([
			'',
			'A',
			'A and B',
			'A, B and C'
		]);
	});
});

describe('modes in words', () => {
	it('tell going and coming from settling', () => {
		const { network, system } = solved(ringClosure());
		const solution = solve(system, Float64Array.from([0.5, 0, 0]));
		const words = solution.modes
			.filter((m) => Number.isFinite(m.halfLifeS))
			.sort((a, b) => a.halfLifeS - b.halfLifeS)
			.map((m) => modeWords(network, solution, m));
		expect(words[0]).toBe('A goes, B comes');
		expect(words[1]).toBe('B and C settle');
	});
	it('tell a reversible part that empties from one that settles', () => {
		let c = draft.addSpecies(ringClosure(), { id: 'D', name: '' });
		c = draft.place(draft.place(c, null, 'reactant', 'C'), 's3', 'product', 'D');
		c = draft.setConstant(c, 's3', 'forward', { value: 0.01, unit: '1/h' });
		const { network, system } = solved(c);
		const solution = solve(system, Float64Array.from([0.5, 0, 0, 0]));
		const words = solution.modes
			.filter((m) => Number.isFinite(m.halfLifeS))
			.sort((a, b) => a.halfLifeS - b.halfLifeS)
			.map((m) => modeWords(network, solution, m));
		expect(words).toEqual(['A goes, B comes', 'B and C settle', 'B and C go together']);
	});
});
