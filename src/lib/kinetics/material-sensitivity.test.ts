/** Derivatives of integrals and of the material map, against formulas and complex steps (`test-complex.ts`). */
import { describe, expect, it } from 'vitest';
import { ExtendedPropagator } from './extended';
import { linearSystem } from './linear-system';
import { integralSensitivities, materialSensitivities } from './material-sensitivity';
import { foldParameters, innerParameters } from './parameter-sensitivity';
import { rateConstants } from './rate-laws';
import type { FirstOrderParameter } from './rate-parameters';
import {
	complexConstants,
	complexScheme,
	complexTank,
	derivative,
	integrateComplex,
	real,
	stepped,
	type Complex,
	type ComplexLaw
} from './test-complex';
import { everyLaw } from './test-networks';
import { chain, system } from './test-systems';
import type { Network } from './types';

describe('sensitivities of integrals', () => {
	it('are exact for A → B: ∫A dt = (1 − e^{−kt})/k', () => {
		const [k, t] = [0.7, 2.5];
		const found = integralSensitivities(chain([k]), [1, 0], t, [
			{ kind: 'rate', step: 0, direction: 'forward' },
			{ kind: 'charge', species: 0 }
		]);
		const decay = Math.exp(-k * t);
		expect(found.integral[0]).toBeCloseTo((1 - decay) / k, 14);
		expect(found.ofIntegral[0]).toBeCloseTo(t * decay - (1 - decay) / k, 13);
		expect(found.ofIntegral[2]).toBeCloseTo((1 - decay) / k, 13);
		expect(found.turnover[0]).toBeCloseTo(1 - decay, 14);
		expect(found.ofTurnover[0]).toBeCloseTo(k * t * decay, 13);
	});
});

const conditions = { temperatureK: 325, excessMolPerL: { X: 0.8, Y: 2.5 } };
const charge = [1, 0.2, 0, 0];
const parameters: FirstOrderParameter[] = [
	...[0, 1, 2, 3, 4].map((step) => ({ kind: 'ln rate' as const, step, direction: 'forward' as const })),
	{ kind: 'ln rate', step: 3, direction: 'reverse' },
	{ kind: 'ln equilibrium', step: 0 },
	{ kind: 'charge', species: 0 },
	{ kind: 'charge', species: 1 }
];

function steppedIn(parameter: FirstOrderParameter) {
	const scheme = complexScheme(everyLaw, conditions.excessMolPerL);
	const start = charge.map(real);
	if (parameter.kind === 'charge') start[parameter.species] = stepped(start[parameter.species]);
	if (parameter.kind === 'ln rate') {
		const law = scheme.steps[parameter.step][parameter.direction] as ComplexLaw;
		law.lnK = stepped(law.lnK);
	}
	if (parameter.kind === 'ln equilibrium') {
		const reverse = scheme.steps[parameter.step].reverse as { lnEquilibrium: Complex };
		reverse.lnEquilibrium = stepped(reverse.lnEquilibrium);
	}
	return { scheme, start };
}

/** Net turnover of the steps of `everyLaw` from that of its directions, forward then reverse by step. */
const nets = ([f1, r1, f2, f3, f4, r4, f5]: Complex[]) => [f1.minus(r1), f2, f3, f4.minus(r4), f5];

/** Largest error beside the largest value; until the end some are zero, hence a thousandth of the charge at least. */
function relativeError(found: ArrayLike<number>, expected: number[]): number {
	const size = Math.max(1e-3, ...expected.map(Math.abs));
	return Math.max(...expected.map((value, i) => Math.abs(value - found[i]))) / size;
}

describe('sensitivities of integrals and of the material map, by complex steps', () => {
	const timeS = 5000;
	const scheme = linearSystem(everyLaw, rateConstants(everyLaw, conditions));
	const at = real(conditions.temperatureK);
	const inner = innerParameters(scheme);
	const integrals = integralSensitivities(scheme, charge, timeS, inner);
	const folded = foldParameters(everyLaw, scheme, conditions, integrals.ofIntegral, 4, parameters);
	const map = materialSensitivities(everyLaw, conditions, charge, timeS, parameters);
	const end = materialSensitivities(everyLaw, conditions, charge, Infinity, parameters);

	it.each(parameters.map((parameter, p) => [JSON.stringify(parameter), p] as const))(
		'agree to 1e-12 by %s',
		(_, p) => {
			const { scheme, start } = steppedIn(parameters[p]);
			const found = integrateComplex(scheme, [{ durationS: real(timeS), fromK: at, toK: at }], start);
			const own = (values: Float64Array, size: number) => values.subarray(size * p, size * (p + 1));
			expect(relativeError(own(folded, 4), found.integral.map(derivative))).toBeLessThan(1e-12);
			expect(relativeError(own(map, 5), nets(found.turnover).map(derivative))).toBeLessThan(1e-12);
			// Until the end ∫c dt = (−K)⁻¹ c₀: a tank without bounds.
			const huge = 1e22;
			const all = complexTank(scheme, conditions.temperatureK, real(huge), start).map((c) => c.by(huge));
			const k = complexConstants(scheme, conditions.temperatureK);
			const turnover = [0, 1, 1, 2, 0, 3, 3].map((from, d) => k[d].times(all[from]));
			expect(relativeError(own(end, 5), nets(turnover).map(derivative))).toBeLessThan(1e-11);
		}
	);

	it('keep the net through a fast equilibrium, k t = 1e10, and add up by the charge', () => {
		const law = (kRefPerS: number) => ({
			form: 'arrhenius' as const,
			kRefPerS,
			energyJPerMol: 0,
			excess: []
		});
		const to = (species: string) => [{ species, coefficient: 1 }];
		const quick: Network = {
			species: ['A', 'B', 'C', 'D'].map((id) => ({ id, name: id })),
			referenceTemperatureK: 300,
			steps: [
				{ id: 's1', reactant: 'A', products: to('B'), forward: law(3e10), reverse: law(1e10) },
				{ id: 's2', reactant: 'B', products: to('C'), forward: law(0.7), reverse: null },
				{ id: 's3', reactant: 'A', products: to('D'), forward: law(0.5), reverse: null }
			]
		};
		const found = materialSensitivities(
			quick,
			{ temperatureK: 300, excessMolPerL: {} },
			[1, 0, 0, 0],
			Infinity,
			[
				{ kind: 'ln rate', step: 0, direction: 'forward' },
				{ kind: 'charge', species: 0 }
			]
		);
		// C : D = 0.7 K : 0.5 with K = 3, to 1e-10 of each; ∂/∂ln K of the share q is q (1 − q).
		const q = 2.1 / 2.6;
		[q * (1 - q), q * (1 - q), -q * (1 - q), q, q, 1 - q].forEach((value, i) =>
			expect(found[i]).toBeCloseTo(value, 9)
		);
	});

	it.each([1e2, 1e5, 1e8])(
		'of ∫c dt keep their digits across a fast equilibrium, k %g 1/s for 2 s',
		(fast) => {
			const quick = system(3, [
				[0, 1, 3 * fast],
				[1, 0, fast],
				[1, 2, 0.7]
			]);
			const found = integralSensitivities(quick, [1, 0, 0], 2, innerParameters(quick, 0));
			quick.flows!.forEach((flow, p) => {
				// c, ∂c/∂ln k and its integral as one system, in extended precision.
				const own = quick.transfers.filter((t) => t.step === flow.step);
				const exact = new ExtendedPropagator({
					n: 9,
					outflow: new Float64Array(9),
					transfers: [
						...[0, 3].flatMap((by) =>
							quick.transfers.map((t) => ({ ...t, from: t.from + by, to: t.to + by }))
						),
						...own.map((t) => ({ ...t, to: t.to + 3 })),
						{ ...flow, to: flow.from + 3, coefficient: -1 },
						...[3, 4, 5].map((from) => ({ ...flow, from, to: from + 3, rate: 1, coefficient: 1 }))
					],
					flows: [0, 3].flatMap((by) => quick.flows!.map((f) => ({ ...f, from: f.from + by })))
				});
				const truth = exact.apply(2, [1, 0, 0, 0, 0, 0, 0, 0, 0]);
				expect(
					relativeError(found.ofIntegral.subarray(3 * p, 3 * p + 3), [...truth.subarray(6)])
				).toBeLessThan(1e-12);
			});
		}
	);
});
