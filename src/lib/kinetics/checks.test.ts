import { describe, expect, it } from 'vitest';
import { checkNetwork } from './checks';
import { conservedTotals } from './conserved';
import { balancingReverse, reversibleCycles } from './cycles';
import { toNetwork } from './from-scheme';
import { symbolicMatrix } from './linear-system';
import { activationEntropy, eyringConstant, GAS_CONSTANT, rateConstants } from './rate-laws';
import type { EquilibriumLaw, Network, RateLaw, Step } from './types';

const law = (k: number, rest: Partial<RateLaw> = {}): RateLaw => ({
	form: 'arrhenius',
	kRefPerS: k,
	energyJPerMol: 0,
	excess: [],
	...rest
});
const step = (
	id: string,
	reactant: string,
	products: string[],
	k = 1,
	reverse: Step['reverse'] = null
): Step => ({
	id,
	reactant,
	products: products.map((species) => ({ species, coefficient: 1 })),
	forward: law(k),
	reverse
});
const network = (ids: string, steps: Step[]): Network => ({
	species: [...ids].map((id) => ({ id, name: id })),
	steps,
	referenceTemperatureK: 323.15
});
const conditions = { temperatureK: 323.15, excessMolPerL: {} };
const codes = (found: { code: string }[]) => found.map((issue) => issue.code);

describe('checks of a network', () => {
	it('finds nothing in a sound scheme', () => {
		expect(
			checkNetwork(
				network('ABC', [step('s1', 'A', ['B']), step('s2', 'B', ['C'], 1, law(0.5))]),
				{ A: 1 },
				conditions
			)
		).toEqual([]);
	});
	it.each<[string, Network, string, string]>([
		['an unknown species', network('A', [step('s1', 'A', ['B'])]), 'species-unknown', 's1'],
		['a step to itself', network('AB', [step('s1', 'A', ['A'])]), 'step-to-itself', 's1'],
		['a negative constant', network('AB', [step('s1', 'A', ['B'], -1)]), 'constant-invalid', 's1'],
		['a constant that is no number', network('AB', [step('s1', 'A', ['B'], NaN)]), 'constant-invalid', 's1'],
		[
			'two steps of one id',
			network('ABC', [step('s1', 'A', ['B']), step('s1', 'B', ['C'])]),
			'step-duplicate',
			's1'
		],
		[
			'a reversible split',
			network('ABC', [step('s1', 'A', ['B', 'C'], 1, law(1))]),
			'reversible-not-one-to-one',
			's1'
		],
		[
			'a negative coefficient',
			network('AB', [{ ...step('s1', 'A', ['B']), products: [{ species: 'B', coefficient: -1 }] }]),
			'coefficient-invalid',
			's1'
		]
	])('stops at %s', (_, scheme, code, stepId) => {
		const [issue] = checkNetwork(scheme);
		expect(issue).toMatchObject({ level: 'stop', code, stepId });
		expect(issue.message).toContain(stepId);
	});
	it('stops at a loop that multiplies', () => {
		const doubling = { ...step('s1', 'A', ['B']), products: [{ species: 'B', coefficient: 2 }] };
		expect(codes(checkNetwork(network('AB', [doubling, step('s2', 'B', ['A'])])))).toContain(
			'coefficient-invalid'
		);
	});
	it('reports duplicates, idle species and species that nothing reaches', () => {
		const found = checkNetwork(
			network('ABCD', [step('s1', 'A', ['B']), step('s2', 'A', ['B']), step('s3', 'C', ['B'])]),
			{ A: 1 }
		);
		expect(codes(found)).toEqual(['step-duplicate', 'species-unreached', 'species-in-no-step']);
		expect(found[1].speciesId).toBe('C');
		expect(codes(checkNetwork(network('AA', [])))).toContain('species-duplicate');
	});
	it('refuses a charge that is negative or of an unknown species', () => {
		const scheme = network('AB', [step('s1', 'A', ['B'])]);
		expect(codes(checkNetwork(scheme, { A: -1 }))).toEqual(['charge-invalid']);
		expect(codes(checkNetwork(scheme, { Z: 1 }))).toEqual(['species-unknown']);
	});
	it('reports mass that appears or vanishes where molar masses are known, unless the reagent in excess brings it', () => {
		const scheme = network('ABN', [step('s1', 'A', ['B'])]);
		scheme.species[0].molarMassGPerMol = 214.2;
		scheme.species[1].molarMassGPerMol = 232.2;
		const [issue] = checkNetwork(scheme, { A: 1 });
		expect(issue).toMatchObject({ code: 'mass-imbalance', stepId: 's1' });
		expect(issue.message).toContain('18.00 g/mol');
		scheme.species[2].molarMassGPerMol = 18;
		scheme.steps[0].forward.excess = [{ species: 'N', order: 1 }];
		expect(codes(checkNetwork(scheme, { A: 1 }))).toEqual([]);
	});
	it('warns below ten equivalents of a reagent in excess, and stops without its concentration', () => {
		const scheme = network('ABN', [step('s1', 'A', ['B'])]);
		scheme.steps[0].forward.excess = [{ species: 'N', order: 1 }];
		const at = (N?: number) =>
			codes(
				checkNetwork(
					scheme,
					{ A: 0.5 },
					{ temperatureK: 323.15, excessMolPerL: N === undefined ? {} : { N } }
				)
			);
		expect(at(5)).toEqual([]);
		expect(at(4.9)).toEqual(['excess-too-small']);
		expect(at()).toEqual(['excess-missing']);
	});
});

describe("Wegscheider's condition", () => {
	// The loop A ⇌ B ⇌ C ⇌ A with 1.0/0.5, 0.8/0.2, 0.3/x 1/h needs x = 2.4 (a worked example of ours).
	const loop = (x: number) =>
		network('ABC', [
			step('s1', 'A', ['B'], 1, law(0.5)),
			step('s2', 'B', ['C'], 0.8, law(0.2)),
			step('s3', 'C', ['A'], 0.3, law(x))
		]);
	it('is met by the constant that it asks for', () => {
		expect(checkNetwork(loop(2.4), { A: 1 }, conditions)).toEqual([]);
	});
	it('reports the ratio round the loop', () => {
		const [issue] = checkNetwork(loop(1.2), { A: 1 }, conditions);
		expect(issue).toMatchObject({ level: 'caution', code: 'detailed-balance-broken', stepId: 's3' });
		expect(issue.ratio).toBeCloseTo(2, 12);
	});
	it('names the constant that would balance the loop', () => {
		const constants = rateConstants(loop(1.2), conditions);
		const [cycle] = reversibleCycles(loop(1.2), constants);
		expect(balancingReverse(cycle, constants)).toBeCloseTo(2.4, 12);
	});
	it('finds one loop for every reversible step outside a spanning tree', () => {
		const scheme = loop(2.4);
		scheme.species.push({ id: 'D', name: 'D' });
		scheme.steps.push(
			step('s4', 'C', ['D'], 1, law(1)),
			step('s5', 'D', ['A'], 1, law(1)),
			step('s6', 'A', ['B'], 2, law(1))
		);
		const loops = reversibleCycles(scheme, rateConstants(scheme, conditions));
		expect(loops.map((cycle) => cycle.steps[0].stepId)).toEqual(['s3', 's5', 's6']);
		expect(loops[2].ratio).toBeCloseTo(1, 12);
	});
	it('says that an irreversible loop must be driven from outside', () => {
		const scheme = network('ABC', [step('s1', 'A', ['B']), step('s2', 'B', ['C']), step('s3', 'C', ['A'])]);
		expect(codes(checkNetwork(scheme, { A: 1 }))).toEqual(new Array(3).fill('detailed-balance-broken'));
	});
});

describe('rate laws', () => {
	const at = (temperatureK: number, excessMolPerL: Record<string, number> = {}) => ({
		temperatureK,
		excessMolPerL
	});
	it('Arrhenius: the constant at the reference is k_ref, and its slope in 1/T is −Ea/R', () => {
		const scheme = network('AB', [step('s1', 'A', ['B'])]);
		scheme.steps[0].forward = law(0.02, { energyJPerMol: 72000 });
		expect(rateConstants(scheme, at(323.15)).forward[0]).toBe(0.02);
		const ratio = rateConstants(scheme, at(333.15)).forward[0] / 0.02;
		expect(Math.log(ratio) / (1 / 323.15 - 1 / 333.15)).toBeCloseTo(72000 / GAS_CONSTANT, 8);
	});
	it('Eyring: k/T follows ΔH‡, and ΔS‡ comes back from the constant', () => {
		const k = eyringConstant(80000, -30, 323.15);
		expect(activationEntropy(k, 80000, 323.15)).toBeCloseTo(-30, 10);
		const scheme = network('AB', [step('s1', 'A', ['B'])]);
		scheme.steps[0].forward = law(k, { form: 'eyring', energyJPerMol: 80000 });
		expect(rateConstants(scheme, at(350)).forward[0] / eyringConstant(80000, -30, 350)).toBeCloseTo(1, 12);
	});
	it('reverse through the equilibrium constant follows van ’t Hoff', () => {
		const equilibrium: EquilibriumLaw = { form: 'equilibrium', kEqRef: 3, enthalpyJPerMol: -20000 };
		const scheme = network('AB', [step('s1', 'A', ['B'], 0.3, equilibrium)]);
		expect(rateConstants(scheme, at(323.15)).reverse[0]).toBeCloseTo(0.1, 15);
		const hot = rateConstants(scheme, at(343.15));
		expect(Math.log(hot.forward[0] / hot.reverse[0] / 3)).toBeCloseTo(
			(20000 / GAS_CONSTANT) * (1 / 343.15 - 1 / 323.15),
			12
		);
	});
	it('multiplies by the species in excess to their order, and never assumes one', () => {
		const scheme = network('ABN', [step('s1', 'A', ['B'])]);
		scheme.steps[0].forward = law(0.02, { excess: [{ species: 'N', order: 2 }] });
		expect(rateConstants(scheme, at(323.15, { N: 3 })).forward[0]).toBeCloseTo(0.18, 15);
		expect(() => rateConstants(scheme, at(323.15))).toThrow(/N, in excess, is missing/);
		expect(() => rateConstants(scheme, at(-1, { N: 3 }))).toThrow(/above 0 K/);
	});
});

describe('the rate matrix and conserved totals in words', () => {
	it('lists the signed constants of each cell', () => {
		const cells = symbolicMatrix(network('ABC', [step('s1', 'A', ['B']), step('s2', 'B', ['C'], 1, law(1))]));
		const text = cells.map((row) =>
			row.map((cell) => cell.map((t) => `${t.sign < 0 ? '−' : ''}${t.symbol}`).join(' '))
		);
		expect(text).toEqual([
			['−k1', '', ''],
			['k1', '−k2', 'k−2'],
			['', 'k2', '−k−2']
		]);
	});
	it('names conserved totals', () => {
		const names = (ids: string, steps: Step[]) =>
			conservedTotals(network(ids, steps)).map((total) => total.name);
		expect(names('ABC', [step('s1', 'A', ['B']), step('s2', 'B', ['C'])])).toEqual(['A + B + C']);
		expect(names('ABC', [step('s1', 'A', ['B', 'C'])]).sort()).toEqual(['A + B', 'A + C']);
		expect(
			names('AB', [{ ...step('s1', 'A', ['B']), products: [{ species: 'B', coefficient: 2 }] }])
		).toEqual(['2 A + B']);
		expect(names('AB', [step('s1', 'A', ['B']), step('s2', 'A', [])])).toEqual([]);
		expect(conservedTotals(network('AB', [step('s1', 'A', ['B'])]), [0.4, 0.1])[0].total).toBeCloseTo(
			0.5,
			15
		);
	});
});

describe('from a scheme to a network', () => {
	const scheme = {
		species: [
			{ id: 'A', name: 'HX-14', role: 'starting material' as const, molarMassGPerMol: 214.2 },
			{ id: 'B', name: '' }
		],
		steps: [
			{
				id: 's1',
				reactant: 'A',
				products: [{ species: 'B', coefficient: 1 }],
				forward: {
					kRef: { value: 0.794, unit: '1/h' },
					activationEnergy: { fit: true as const, guess: { value: 72, unit: 'kJ/mol' } }
				},
				reverse: { equilibriumConstant: { value: 3, unit: '1' } }
			}
		],
		referenceTemperature: { value: 50, unit: 'degC' }
	};
	it('converts every number to SI', () => {
		const { network: read, issues } = toNetwork(scheme);
		expect(issues).toEqual([]);
		expect(read.referenceTemperatureK).toBe(323.15);
		expect(read.species.map(({ name }) => name)).toEqual(['HX-14', 'B']);
		expect(read.steps[0].forward).toEqual({
			form: 'arrhenius',
			kRefPerS: 0.794 / 3600,
			energyJPerMol: 72000,
			excess: []
		});
		expect(read.steps[0].reverse).toEqual({ form: 'equilibrium', kEqRef: 3, enthalpyJPerMol: 0 });
	});
	it('leaves out a step whose unit cannot be read, and says which would be', () => {
		const wrong = {
			...scheme,
			steps: [{ ...scheme.steps[0], forward: { kRef: { value: 1, unit: 'L/(mol h)' } } }]
		};
		const { network: read, issues } = toNetwork(wrong);
		expect(read.steps).toEqual([]);
		expect(issues[0]).toMatchObject({ level: 'stop', code: 'unit-invalid', stepId: 's1' });
		expect(issues[0].message).toContain('1/s, 1/min, 1/h, 1/d');
	});
	it('takes no products for a loss, or for an unfinished step where the page asks so', () => {
		const open = { ...scheme, steps: [{ ...scheme.steps[0], products: [], reverse: null }] };
		expect(toNetwork(open).network.steps[0].products).toEqual([]);
		const unfinished = toNetwork(open, { emptyProducts: 'unfinished' });
		expect(unfinished.network.steps).toEqual([]);
		expect(unfinished.issues[0]).toMatchObject({ code: 'step-dangling', stepId: 's1' });
	});
});
