import { describe, expect, it } from 'vitest';
import { toCriterion } from './criteria';
import { holdIntervalsOn } from './criteria-hold';
import { integrate } from './dormand-prince';
import { linearSystem, rateMatrix } from './linear-system';
import { holdSegment, programFromLog, rampSegment, runProgram, type ProgramSegment } from './programs';
import { rateConstants } from './rate-laws';
import { solve } from './solve';
import { temperatureAt } from './program-segments';
import type { Network } from './types';

const HOUR = 3600;
const celsius = (t: number) => t + 273.15;
const law = (perHour: number, kJ: number) => ({
	form: 'arrhenius' as const,
	kRefPerS: perHour / HOUR,
	energyJPerMol: kJ * 1000,
	excess: []
});
const species = (ids: string) => [...ids].map((id) => ({ id, name: id }));
const one = (id: string) => [{ species: id, coefficient: 1 }];

/** Invented case: A → B → C, 40 °C, k1 1.20 1/h (72 kJ/mol), k2 0.0080 1/h (98 kJ/mol). */
const series: Network = {
	species: species('ABC'),
	referenceTemperatureK: celsius(40),
	steps: [
		{ id: 's1', reactant: 'A', products: one('B'), forward: law(1.2, 72), reverse: null },
		{ id: 's2', reactant: 'B', products: one('C'), forward: law(0.008, 98), reverse: null }
	]
};
const plant = (holdH: number): ProgramSegment[] => [
	rampSegment(celsius(15), celsius(40), 2 * HOUR),
	holdSegment(celsius(40), holdH * HOUR),
	rampSegment(celsius(40), celsius(5), 3 * HOUR)
];

/** A branched scheme with a reversible step through its equilibrium, a loss, and 2:1 stoichiometry. */
const branched: Network = {
	species: species('ABCD'),
	referenceTemperatureK: celsius(50),
	steps: [
		{
			id: 's1',
			reactant: 'A',
			products: one('B'),
			forward: law(3, 60),
			reverse: { form: 'equilibrium', kEqRef: 2, enthalpyJPerMol: -30_000 }
		},
		{
			id: 's2',
			reactant: 'B',
			products: [{ species: 'C', coefficient: 2 }],
			forward: law(0.5, 95),
			reverse: law(0, 0)
		},
		{ id: 's3', reactant: 'C', products: [], forward: { ...law(0.2, 40), form: 'eyring' }, reverse: null },
		{ id: 's4', reactant: 'A', products: one('D'), forward: law(0.1, 110), reverse: null }
	]
};
branched.steps[1].reverse = null;

function reference(
	network: Network,
	program: ProgramSegment[],
	charge: number[],
	times: number[]
): Float64Array {
	const n = network.species.length;
	const edges = program.map((_, i) => program.slice(0, i + 1).reduce((sum, s) => sum + s.durationS, 0));
	let state = Float64Array.from(charge);
	let start = 0;
	const out = new Float64Array(n * times.length);
	edges.forEach((edge) => {
		const asked = times.map((t, k) => ({ t, k })).filter(({ t }) => t > start && t <= edge);
		const middle = start;
		const f = (t: number, y: Float64Array, dy: Float64Array) => {
			const temperatureK = temperatureAt(program, Math.min(middle + t, edge - 1e-9));
			const k = rateMatrix(
				linearSystem(network, rateConstants(network, { temperatureK, excessMolPerL: {} }))
			);
			for (let i = 0; i < n; i++) {
				dy[i] = 0;
				for (let j = 0; j < n; j++) dy[i] += k[i * n + j] * y[j];
			}
		};
		const found = integrate(f, state, [...asked.map(({ t }) => t - middle), edge - middle], {
			relative: 1e-12,
			absolute: 1e-15
		});
		asked.forEach(({ k }, m) => out.set(found.subarray(m * n, (m + 1) * n), k * n));
		state = found.slice(asked.length * n, (asked.length + 1) * n);
		start = edge;
	});
	return out;
}

describe('temperature programs', () => {
	it('gives the invented plant profile: 15 → 40 °C in 2 h, 3.84 h hold, 40 → 5 °C in 3 h', () => {
		const solution = runProgram(series, plant(3.84), [1, 0, 0]);
		// Printed to two decimals; A after cooling is 0.1350 % and printed as 0.13.
		const near = (h: number, expected: number[]) =>
			solution.at(h * HOUR).forEach((c, i) => expect(Math.abs(100 * c - expected[i])).toBeLessThan(0.0052));
		near(2, [39.16, 60.65, 0.19]);
		near(5.84, [0.39, 96.65, 2.96]);
		near(8.84, [0.13, 96.39, 3.48]);
		const toOnePercent = Math.log(solution.at(2 * HOUR)[0] / 0.01) / 1.2;
		expect(toOnePercent).toBeCloseTo(3.06, 2);
	});

	it('finds when criteria hold along the whole profile', () => {
		const solution = runProgram(series, plant(3.84), [1, 0, 0]);
		const criteria = (['A', 'C'] as const).map((id, i) =>
			toCriterion(
				{ species: id, relation: 'NMT', limit: [1, 3][i], unit: '% of charge' },
				{ network: series, charge: [1, 0, 0] }
			)
		);
		const { spans } = holdIntervalsOn(solution.track(), criteria);
		expect(spans.length).toBe(1);
		expect(spans[0].fromS / HOUR).toBeCloseTo(2 + 3.06, 2);
		expect(solution.at(spans[0].toS)[2]).toBeCloseTo(0.03, 9);
		expect(spans[0]).toMatchObject({ bindsFrom: 0, bindsTo: 1 });
	});

	it('agrees with a high-order integration of the same profile to 1e-10 of the charge', () => {
		const program = [
			rampSegment(celsius(15), celsius(80), 1.5 * HOUR),
			holdSegment(celsius(80), 0.5 * HOUR),
			rampSegment(celsius(30), celsius(60), 0.4 * HOUR),
			rampSegment(celsius(60), celsius(-10), 2 * HOUR)
		];
		const times = [0.3, 0.9, 1.5, 1.77, 2, 2.2, 2.4, 3, 4.4].map((h) => Math.round(h * HOUR));
		for (const network of [branched, series]) {
			const charge = [1, ...new Array<number>(network.species.length - 1).fill(0)];
			const expected = reference(network, program, charge, times);
			const found = runProgram(network, program, charge).curves(times);
			found.forEach((value, i) => expect(Math.abs(value - expected[i])).toBeLessThan(1e-10));
		}
	});

	it('estimates its own error by step doubling: a hundred times tighter tolerance changes less than the estimate allows', () => {
		const program = plant(1);
		const coarse = runProgram(branched, program, [1, 0, 0, 0], { tolerance: 1e-7 });
		const fine = runProgram(branched, program, [1, 0, 0, 0], { tolerance: 1e-12 });
		const end = coarse.durationS;
		expect(coarse.errorEstimate).toBeLessThan(2e-7);
		for (let i = 0; i < 4; i++)
			expect(Math.abs(coarse.at(end)[i] - fine.at(end)[i])).toBeLessThan(2 * coarse.errorEstimate + 1e-12);
	});

	it('is the closed form in a hold and the product of closed forms after a jump', () => {
		const system = (t: number) =>
			linearSystem(branched, rateConstants(branched, { temperatureK: celsius(t), excessMolPerL: {} }));
		const middle = solve(system(30), [1, 0, 0, 0]).at(1800);
		const end = solve(system(70), middle).at(900);
		const solution = runProgram(
			branched,
			[holdSegment(celsius(30), 1800), holdSegment(celsius(70), 900)],
			[1, 0, 0, 0]
		);
		solution.at(2700).forEach((c, i) => expect(c).toBeCloseTo(end[i], 13));
		expect([...solution.at(0)]).toEqual([1, 0, 0, 0]);
	});

	it('reads a measured log as ramps, held at its ends', () => {
		const program = programFromLog([600, 1200, 3000], [300, 310, 305], 3600);
		expect(program.map((s) => s.durationS)).toEqual([600, 600, 1800, 600]);
		expect(temperatureAt(program, 0)).toBe(300);
		expect(temperatureAt(program, 900)).toBeCloseTo(305, 12);
		expect(temperatureAt(program, 3600)).toBe(305);
		expect(() => programFromLog([0, 10, 10], [300, 300, 300])).toThrow(/must increase/);
	});

	it('refuses an empty program and impossible temperatures', () => {
		expect(() => runProgram(series, [], [1, 0, 0])).toThrow(/empty/);
		expect(() => runProgram(series, [holdSegment(-5, 10)], [1, 0, 0])).toThrow(/above 0 K/);
	});
});
