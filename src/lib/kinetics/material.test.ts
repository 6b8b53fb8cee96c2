import { describe, expect, it } from 'vitest';
import { apparentConstantBias, pseudoFirstOrderAdequacy } from './adequacy';
import { linearSystem } from './linear-system';
import { heatReleased, heatReleaseRate, materialMap } from './material';
import { rateConstants } from './rate-laws';
import { solve } from './solve';
import { tieLoop, withTie } from './tie';
import type { Network, Step } from './types';

const step = (
	id: string,
	from: string,
	to: string[],
	forward: number,
	reverse = 0,
	energies = [0, 0]
): Step => {
	const law = (kRefPerS: number, kJ: number) => ({
		form: 'arrhenius' as const,
		kRefPerS,
		energyJPerMol: 1000 * kJ,
		excess: []
	});
	return {
		id,
		reactant: from,
		products: to.map((species) => ({ species, coefficient: 1 })),
		forward: law(forward, energies[0]),
		reverse: reverse > 0 ? law(reverse, energies[1]) : null
	};
};
const network = (ids: string, steps: Step[]): Network => ({
	species: [...ids].map((id) => ({ id, name: id })),
	steps,
	referenceTemperatureK: 298.15
});
const systemOf = (scheme: Network, temperatureK = 298.15) =>
	linearSystem(scheme, rateConstants(scheme, { temperatureK, excessMolPerL: {} }));

describe('the material map', () => {
	it('splits parallel steps by their constants, to the end and to a time', () => {
		const scheme = network('ABC', [
			step('s1', 'A', ['B'], 3),
			step('s2', 'A', ['C'], 1),
			step('s3', 'B', ['C'], 0.5)
		]);
		const end = materialMap(scheme, systemOf(scheme), [2, 0, 0]);
		expect(end.map((s) => s.percentOfCharge).map((v) => +v.toFixed(10))).toEqual([75, 25, 75]);
		const early = materialMap(scheme, systemOf(scheme), [2, 0, 0], 0.3);
		expect(early[0].net).toBeCloseTo(1.5 * (1 - Math.exp(-1.2)), 12);
		const c = solve(systemOf(scheme), [2, 0, 0]).at(0.3);
		expect(early[0].net - early[2].net).toBeCloseTo(c[1], 12);
	});

	it('tells the net flow through a fast equilibrium that gross flows would lose', () => {
		const scheme = network('ABC', [step('s1', 'A', ['B'], 1e7, 2e7), step('s2', 'B', ['C'], 1e-5)]);
		const end = materialMap(scheme, systemOf(scheme), [1, 0, 0]);
		expect(end[0].net).toBeCloseTo(1, 12);
		expect(end[0].forward).toBeGreaterThan(1e11);
		const early = materialMap(scheme, systemOf(scheme), [1, 0, 0], 1000);
		const c = solve(systemOf(scheme), [1, 0, 0]).at(1000);
		expect(early[0].net).toBeCloseTo(c[1] + c[2], 12);
	});

	it('gives the net to an equilibrium, with endless gross flows', () => {
		const scheme = network('AB', [step('s1', 'A', ['B'], 1, 3)]);
		const [only] = materialMap(scheme, systemOf(scheme), [1, 0]);
		expect(only).toMatchObject({ forward: Infinity, reverse: Infinity });
		expect(only.net).toBeCloseTo(0.25, 13);
	});

	it('counts both products, losses and heat, and no heat where an enthalpy is missing', () => {
		const scheme = network('ABC', [step('s1', 'A', ['B', 'C'], 1), step('s2', 'B', [], 2)]);
		const linear = systemOf(scheme);
		const map = materialMap(scheme, linear, [1.5, 0, 0]);
		expect(map.map((s) => +s.net.toFixed(12))).toEqual([1.5, 1.5]);
		expect(heatReleased(map, [-140_000, 20_000])).toBeCloseTo(180_000, 6);
		expect(heatReleased(map, [-140_000, null])).toBeNull();
		const solution = solve(linear, [1.5, 0, 0]);
		expect(heatReleaseRate(linear, solution, 0, [-140_000, 20_000])).toBeCloseTo(210_000, 6);
		expect(heatReleaseRate(linear, solution, 1, [-140_000, null])).toBeNull();
	});
});

describe('pseudo-first-order adequacy', () => {
	it('gives a constant that is low by about 4, 8, 14 and 29 % at 10, 5, 3 and 1.5 equivalents', () => {
		for (const [equivalents, percent] of [
			[10, 4],
			[5, 8],
			[3, 14],
			[1.5, 29]
		])
			expect(Math.abs(100 * apparentConstantBias(equivalents) - percent)).toBeLessThan(1);
	});

	it('finds the largest deviation from the exact second-order curve, and where', () => {
		const scheme = network('ABN', [step('s1', 'A', ['B'], 0.01)]);
		scheme.species[2].role = 'reagent in excess';
		scheme.steps[0].forward.excess = [{ species: 'N', order: 1 }];
		for (const [equivalents, worst] of [
			[10, 0],
			[3, 0],
			[1.5, 0]
		]) {
			const charge = 0.2;
			const found = pseudoFirstOrderAdequacy(
				scheme,
				{ temperatureK: 298.15, excessMolPerL: { N: equivalents * charge } },
				[charge, 0, 0],
				6 / (0.01 * equivalents * charge)
			);
			const first = 0.01 * equivalents * charge;
			const e = equivalents;
			const exact = (t: number) => {
				const decay = Math.exp((-(e - 1) * first * t) / e);
				return (charge * (e - 1) * decay) / (e - decay);
			};
			expect(found.species === 'A' || found.species === 'B').toBe(true);
			const a = exact(found.timeS);
			expect(found.true).toBeCloseTo(found.species === 'A' ? a : charge - a, 8);
			expect(found.largestPercentOfCharge).toBeCloseTo(
				(100 * (a - charge * Math.exp(-first * found.timeS))) / charge,
				5
			);
			expect(found.largestPercentOfCharge).toBeGreaterThan(worst);
			expect(found.equivalents.N).toBeCloseTo(equivalents, 12);
			expect(found.usedPercent.N).toBeCloseTo((100 * (charge - exact(6 / first))) / (e * charge), 5);
		}
	});

	it('finds no deviation for a catalyst, which is not used up', () => {
		const scheme = network('ABN', [step('s1', 'A', ['B'], 0.01)]);
		scheme.steps[0].forward.excess = [{ species: 'N', order: 1 }];
		const found = pseudoFirstOrderAdequacy(
			scheme,
			{ temperatureK: 298.15, excessMolPerL: { N: 0.02 } },
			[0.2, 0, 0],
			10_000,
			{ consumed: { N: 0 } }
		);
		expect(found.largestPercentOfCharge).toBeLessThan(1e-6);
	});
});

describe('tying the last constant of a loop', () => {
	it('gives 2.4 for kAB 1.0, kBA 0.5, kBC 0.8, kCB 0.2, kCA 0.3', () => {
		const scheme = network('ABC', [
			step('s1', 'A', ['B'], 1, 0.5),
			step('s2', 'B', ['C'], 0.8, 0.2),
			step('s3', 'C', ['A'], 0.3, 1)
		]);
		const tie = tieLoop(scheme, { temperatureK: 298.15, excessMolPerL: {} }, 's3');
		expect(tie.requiredPerS).toBeCloseTo(2.4, 12);
		expect(tie.loop.length).toBe(3);
	});

	it('closes the loop at every temperature when energies are tied too, whichever direction follows', () => {
		const scheme = network('ABC', [
			step('s1', 'A', ['B'], 1, 0.5, [60, 75]),
			step('s2', 'B', ['C'], 0.8, 0.2, [80, 70]),
			step('s3', 'C', ['A'], 0.3, 1, [55, 90])
		]);
		for (const [id, direction] of [
			['s3', 'reverse'],
			['s2', 'forward'],
			['s1', 'reverse']
		] as const) {
			const tied = withTie(scheme, tieLoop(scheme, { temperatureK: 330, excessMolPerL: {} }, id, direction));
			for (const temperatureK of [280, 330, 400])
				expect(tieLoop(tied, { temperatureK, excessMolPerL: {} }, 's1').ratio).toBeCloseTo(1, 10);
		}
	});

	it('says when there is no loop', () => {
		const scheme = network('ABC', [step('s1', 'A', ['B'], 1, 0.5), step('s2', 'B', ['C'], 0.8)]);
		expect(() => tieLoop(scheme, { temperatureK: 298.15, excessMolPerL: {} }, 's2')).toThrow(/no loop/);
	});
});
