/** Derivatives of flow against complex steps through ways of their own (`test-complex.ts`). */
import { describe, expect, it } from 'vitest';
import { plugFlowSensitivities, tankSensitivities, type FlowParameter } from './flow-sensitivity';
import { tanksInSeries } from './flow';
import { linearSystem } from './linear-system';
import { foldParameters, innerParameters } from './parameter-sensitivity';
import { rateConstants } from './rate-laws';
import { segregatedFlow, type TableParameter } from './residence-table';
import {
	complexScheme,
	complexTank,
	derivative,
	integrateComplex,
	real,
	stepped,
	type Complex,
	type ComplexLaw,
	type ComplexPiece
} from './test-complex';
import { everyLaw } from './test-networks';
import { system } from './test-systems';

const conditions = { temperatureK: 325, excessMolPerL: { X: 0.8, Y: 2.5 } };
const own = linearSystem(everyLaw, rateConstants(everyLaw, conditions));
const feed = [1, 0.2, 0, 0];
const at = real(conditions.temperatureK);

/** Largest error beside the largest value. */
function relativeError(found: ArrayLike<number>, expected: number[]): number {
	const size = Math.max(...expected.map(Math.abs)) || 1;
	return Math.max(...expected.map((value, i) => Math.abs(value - found[i]))) / size;
}

/** Scheme and feed with the step in one parameter of `FlowParameter` (the residence time apart). */
function steppedIn(parameter: FlowParameter | TableParameter) {
	const scheme = complexScheme(everyLaw, conditions.excessMolPerL);
	const start = feed.map(real);
	if (parameter.kind === 'charge') start[parameter.species] = stepped(start[parameter.species]);
	if (parameter.kind === 'rate') {
		const laws = scheme.steps[parameter.step];
		const { reverse } = laws;
		const tied = reverse && 'lnEquilibrium' in reverse ? reverse : null;
		if (parameter.direction === 'forward') {
			laws.forward.lnK = stepped(laws.forward.lnK);
			if (tied) tied.lnEquilibrium = stepped(tied.lnEquilibrium);
		} else if (tied) tied.lnEquilibrium = tied.lnEquilibrium.minus(stepped(real(0)));
		else (reverse as ComplexLaw).lnK = stepped((reverse as ComplexLaw).lnK);
	}
	return { scheme, start };
}

const inner = innerParameters(own);
const parameters: FlowParameter[] = [...inner, { kind: 'residence' }];
const named = <P>(list: P[]) => list.map((parameter, p) => [JSON.stringify(parameter), p] as const);

describe('derivatives of plug flow and tanks, by complex steps', () => {
	const tau = 4000;
	it.each(named(parameters))('agree to 1e-12 by %s', (_, p) => {
		const parameter = parameters[p];
		const { scheme, start } = steppedIn(parameter);
		const time = parameter.kind === 'residence' ? stepped(real(tau)) : real(tau);
		const plug = integrateComplex(scheme, [{ durationS: time, fromK: at, toK: at }], start).c;
		const found = plugFlowSensitivities(own, feed, tau, parameters).subarray(p * 4, p * 4 + 4);
		expect(relativeError(found, plug.map(derivative))).toBeLessThan(1e-12);
		for (const count of [1, 2, 7]) {
			let c: Complex[] = start;
			for (let k = 0; k < count; k++) c = complexTank(scheme, conditions.temperatureK, time.by(1 / count), c);
			const tanks = tankSensitivities(own, feed, tau, count, parameters).subarray(p * 4, p * 4 + 4);
			expect(relativeError(tanks, c.map(derivative)), `${count} tanks`).toBeLessThan(1e-12);
		}
	});

	it('fold into those by the energies and concentrations of the scheme', () => {
		const derivatives = tankSensitivities(own, feed, tau, 3, inner);
		const [energy, excess] = [
			{ kind: 'energy' as const, step: 3, direction: 'reverse' as const },
			{ kind: 'ln excess' as const, species: 'X' }
		];
		const found = foldParameters(everyLaw, own, conditions, derivatives, 4, [energy, excess]);
		const through = (scheme: ReturnType<typeof complexScheme>) => {
			let c = feed.map(real);
			for (let k = 0; k < 3; k++) c = complexTank(scheme, conditions.temperatureK, real(tau / 3), c);
			return c.map(derivative);
		};
		const one = complexScheme(everyLaw, conditions.excessMolPerL);
		(one.steps[3].reverse as ComplexLaw).energy = stepped(real(120_000));
		expect(relativeError(found.subarray(0, 4), through(one))).toBeLessThan(1e-12);
		const two = complexScheme(everyLaw, conditions.excessMolPerL);
		two.excess.X = two.excess.X.times(stepped(real(0)).exp());
		expect(relativeError(found.subarray(4), through(two))).toBeLessThan(1e-12);
	});

	it('are K c₀ by the residence time where there is none', () => {
		const plug = plugFlowSensitivities(own, feed, 0, [{ kind: 'residence' }]);
		const tank = tankSensitivities(own, feed, 0, 2, [{ kind: 'residence' }]);
		const small = tanksInSeries(own, feed, 1e-6, 2);
		expect([...tank]).toEqual([...plug]);
		plug.forEach((value, i) => expect(value).toBeCloseTo((small[i] - feed[i]) / 1e-6, 8));
	});

	it('keep their digits across a fast equilibrium in a tank, k τ = 1e10', () => {
		// A ⇌ B fast, B → C slow: B is A·K, and C follows a single step with k K/(1 + K).
		const [fast, K, k, tau] = [1e10, 3, 0.7, 1];
		const quick = system(3, [
			[0, 1, fast],
			[1, 0, fast / K],
			[1, 2, k]
		]);
		const found = tankSensitivities(quick, [1, 0, 0], tau, 1, innerParameters(quick));
		const share = K / (1 + K);
		const effective = k * share * tau;
		// c_C = κ/(1 + κ), κ = k K τ/(1 + K): by ln k_f as by ln K; corrections are of the order 1/(k τ).
		const byLnKappa = effective / (1 + effective) ** 2;
		expect(found[2]).toBeCloseTo(byLnKappa * (1 - share), 9);
		expect(found[3 + 2]).toBeCloseTo(-byLnKappa * (1 - share), 9);
		expect(found[2 * 3 + 2]).toBeCloseTo(byLnKappa, 9);
	});
});

describe('derivatives of a table of residence times, by complex steps', () => {
	const table = { timesS: [300, 1500, 2600, 7000], density: [0.1, 1, 0.4, 0.05] };
	const rows: TableParameter[] = table.timesS.flatMap((_, row) => [
		{ kind: 'density', row },
		{ kind: 'time', row }
	]);
	const all: TableParameter[] = [...inner, ...rows, { kind: 'ln residence' }];
	const found = segregatedFlow(own, feed, table, all).sensitivities;

	it.each(named(all))('agree to 1e-12 by %s', (_, p) => {
		const parameter = all[p];
		const { scheme, start } = steppedIn(parameter);
		const density = table.density.map(real);
		let times = table.timesS.map(real);
		if (parameter.kind === 'density') density[parameter.row] = stepped(density[parameter.row]);
		if (parameter.kind === 'time') times[parameter.row] = stepped(times[parameter.row]);
		if (parameter.kind === 'ln residence') times = times.map((t) => t.times(stepped(real(0)).exp()));
		const zero = real(0);
		const pieces = times.map((t, m): ComplexPiece => ({
			durationS: m === 0 ? t : t.minus(times[m - 1]),
			fromK: at,
			toK: at,
			density: m === 0 ? [zero, zero] : [density[m - 1], density[m]]
		}));
		let area = zero;
		for (let m = 1; m < times.length; m++)
			area = area.plus(
				times[m]
					.minus(times[m - 1])
					.times(density[m].plus(density[m - 1]))
					.by(0.5)
			);
		const expected = integrateComplex(scheme, pieces, start).integral.map((v) => derivative(v.over(area)));
		expect(relativeError(found.subarray(p * 4, p * 4 + 4), expected)).toBeLessThan(1e-12);
	});

	it('keep their digits across a fast equilibrium, k t = 1e8: ln K alone counts, and all add up to the times alike', () => {
		const fast = 1e8;
		const quick = system(3, [
			[0, 1, 3 * fast],
			[1, 0, fast],
			[1, 2, 0.7]
		]);
		const triangle = { timesS: [0, 1, 3], density: [0, 1, 0] };
		const by: TableParameter[] = [...innerParameters(quick, 0), { kind: 'ln residence' }];
		const { outlet, sensitivities: s } = segregatedFlow(quick, [1, 0, 0], triangle, by);
		// One slow mode, e^{−κt} with κ = ¾ · 0.7, but for terms of 1/(k t): ∂/∂ln K of the sum A + B is κ (1 − ¾) ∂/∂κ.
		const slow = 0.7 * 0.75;
		const remains = (k: number) =>
			((1 - Math.exp(-k) * (1 + k)) / k ** 2 +
				((2 * k - 1) * Math.exp(-k) + Math.exp(-3 * k)) / (2 * k ** 2)) /
			1.5;
		const h = 1e-5;
		const byLnSlow = (slow * (remains(slow + h) - remains(slow - h))) / (2 * h);
		expect(outlet[0] + outlet[1]).toBeCloseTo(remains(slow), 7);
		expect(s[0] + s[1]).toBeCloseTo(0.25 * byLnSlow, 7);
		expect(s[0] + s[1] + s[3] + s[4]).toBeCloseTo(0, 7);
		expect(s[0] + s[1] + s[2]).toBeCloseTo(0, 12);
		expect(s[9 + 2]).toBeCloseTo(s[6 + 2], 7);
	});

	it('name a row that is not there', () => {
		expect(() => segregatedFlow(own, feed, table, [{ kind: 'time', row: 4 }])).toThrow(
			'Row 5 is not in the table, which has 4.'
		);
	});
});
