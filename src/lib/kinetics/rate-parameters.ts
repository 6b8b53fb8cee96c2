/**
 * How each parameter of a network moves each rate constant: the chain rule between ∂/∂ln k and what people fit or vary.
 *
 *     ∂ ln k/∂ ln k_ref = 1,   ∂ ln k/∂Ea = −(1/T − 1/T_ref)/R
 *     ∂ ln k/∂ ln [X] = m,     ∂ ln k/∂m = ln [X]
 *     ∂ ln k/∂T = Ea/(R T²)  (+ 1/T in Eyring's form)
 *     reverse through K:  ∂ ln k_r/∂ ln K_ref = −1,  ∂ ln k_r/∂ΔH° = +(1/T − 1/T_ref)/R, and all of the forward ones;
 *                         ∂ ln K/∂T = ΔH°/(R T²)
 *
 * | symbol | name here |
 * | --- | --- |
 * | ∂ ln k/∂θ | `RateEffect.perUnit` |
 * | [X], m | `Conditions.excessMolPerL`, `ExcessOrder.order` |
 *
 * Sources: S. Arrhenius, Z. Phys. Chem. 4 (1889) 226; J. H. van 't Hoff, Études de dynamique chimique (1884);
 * H. Eyring, J. Chem. Phys. 3 (1935) 107. Each effect is the derivative of the law in `rate-laws.ts`.
 */
import { GAS_CONSTANT, inverseTemperatureGap } from './rate-laws';
import type { Conditions, LinearSystem, Network, RateLaw } from './types';

export type Direction = 'forward' | 'reverse';

export type RateParameter =
	/** ln k_ref of one direction. */
	| { kind: 'ln rate'; step: number; direction: Direction }
	/** Ea or ΔH‡ of one direction, J/mol. */
	| { kind: 'energy'; step: number; direction: Direction }
	/** ln K_ref of a reverse direction given through its equilibrium. */
	| { kind: 'ln equilibrium'; step: number }
	/** ΔH° of it, J/mol. */
	| { kind: 'enthalpy'; step: number }
	/** ln [X] of a species held in excess, in every law that names it. */
	| { kind: 'ln excess'; species: string }
	/** Order of one direction in a species held in excess. */
	| { kind: 'order'; step: number; direction: Direction; species: string }
	/** The temperature, K: of a whole program, that many kelvin more at every time. */
	| { kind: 'temperature' };

/** What can be varied: a rate parameter, or the charge of a species, mol/L. */
export type FirstOrderParameter = RateParameter | { kind: 'charge'; species: number };

export interface RateEffect {
	step: number;
	direction: Direction;
	perUnit: number;
}

/** Effects of one parameter on ln k of the directions that it moves, under one set of conditions. */
export function rateEffects(
	network: Network,
	conditions: Conditions,
	parameter: RateParameter
): RateEffect[] {
	if (parameter.kind === 'ln excess' || parameter.kind === 'temperature')
		return network.steps.flatMap((_, step) => effectsOn(network, conditions, parameter, step));
	return effectsOn(network, conditions, parameter, parameter.step);
}

/** The effects within one step: on its own directions, and on a reverse that follows the forward constant. */
function effectsOn(
	network: Network,
	conditions: Conditions,
	parameter: RateParameter,
	step: number
): RateEffect[] {
	const laws = network.steps[step];
	if (!laws) return [];
	const { forward, reverse } = laws;
	const perEnergy =
		-inverseTemperatureGap(conditions.temperatureK, network.referenceTemperatureK) / GAS_CONSTANT;
	const ofForward = lawEffect(forward, 'forward', conditions, parameter, perEnergy);
	const effects: RateEffect[] = [{ step, direction: 'forward', perUnit: ofForward }];
	if (reverse?.form === 'equilibrium') {
		const perUnit = ofForward - equilibriumEffect(reverse.enthalpyJPerMol, conditions, parameter, perEnergy);
		effects.push({ step, direction: 'reverse', perUnit });
	} else if (reverse) {
		const perUnit = lawEffect(reverse, 'reverse', conditions, parameter, perEnergy);
		effects.push({ step, direction: 'reverse', perUnit });
	}
	return effects.filter((effect) => effect.perUnit !== 0);
}

/** ∂ ln k/∂θ of one law of its own. */
function lawEffect(
	law: RateLaw,
	direction: Direction,
	{ temperatureK, excessMolPerL }: Conditions,
	parameter: RateParameter,
	perEnergy: number
): number {
	switch (parameter.kind) {
		case 'ln rate':
			return parameter.direction === direction ? 1 : 0;
		case 'energy':
			return parameter.direction === direction ? perEnergy : 0;
		case 'ln excess':
			return orderIn(law, parameter.species);
		case 'order': {
			const named = law.excess.some((e) => e.species === parameter.species);
			const present = excessMolPerL[parameter.species] ?? 0;
			// Without any of it the constant is zero whatever the order: nothing to move.
			return parameter.direction === direction && named && present > 0 ? Math.log(present) : 0;
		}
		case 'temperature': {
			const energy = law.energyJPerMol / (GAS_CONSTANT * temperatureK * temperatureK);
			return law.form === 'eyring' ? energy + 1 / temperatureK : energy;
		}
		default:
			return 0;
	}
}

/** ∂ ln K/∂θ. */
function equilibriumEffect(
	enthalpyJPerMol: number,
	{ temperatureK }: Conditions,
	parameter: RateParameter,
	perEnergy: number
): number {
	if (parameter.kind === 'ln equilibrium') return 1;
	if (parameter.kind === 'enthalpy') return perEnergy;
	if (parameter.kind === 'temperature') return enthalpyJPerMol / (GAS_CONSTANT * temperatureK ** 2);
	return 0;
}

function orderIn(law: RateLaw, species: string): number {
	return law.excess.reduce((sum, e) => (e.species === species ? sum + e.order : sum), 0);
}

/**
 * ∂ ln k_d/∂θ of every step-direction that carries anything, in the order of `system.flows`, so that
 * ∂y/∂θ = Σ_d weights[d] · ∂y/∂ln k_d for whatever follows from the constants.
 */
export function chainWeights(
	network: Network,
	system: LinearSystem,
	conditions: Conditions,
	parameter: RateParameter
): Float64Array {
	const effects = rateEffects(network, conditions, parameter);
	return Float64Array.from(
		system.flows ?? [],
		(flow) => effects.find((e) => e.step === flow.step && e.direction === flow.direction)?.perUnit ?? 0
	);
}
