/**
 * How each parameter of a network moves each rate constant: the chain rule between ∂/∂ln k and what people fit or vary.
 *
 *     ∂ ln k/∂ ln k_ref = 1,   ∂ ln k/∂Ea = −(1/T − 1/T_ref)/R
 *     reverse through K:  ∂ ln k_r/∂ ln K_ref = −1,  ∂ ln k_r/∂ΔH° = +(1/T − 1/T_ref)/R, and all of the forward ones
 *
 * | symbol | name here |
 * | --- | --- |
 * | ∂ ln k/∂θ | `RateEffect.perUnit` |
 */
import { GAS_CONSTANT, inverseTemperatureGap } from './rate-laws';
import type { Network } from './types';

export type RateParameter =
	/** ln k_ref of one direction. */
	| { kind: 'ln rate'; step: number; direction: 'forward' | 'reverse' }
	/** Ea or ΔH‡ of one direction, J/mol. */
	| { kind: 'energy'; step: number; direction: 'forward' | 'reverse' }
	/** ln K_ref of a reverse direction given through its equilibrium. */
	| { kind: 'ln equilibrium'; step: number }
	/** ΔH° of it, J/mol. */
	| { kind: 'enthalpy'; step: number };

/** What can be varied: a rate parameter, or the charge of a species, mol/L. */
export type FirstOrderParameter = RateParameter | { kind: 'charge'; species: number };

export interface RateEffect {
	step: number;
	direction: 'forward' | 'reverse';
	perUnit: number;
}

/** Effects of one parameter on ln k of the directions that it moves, at one temperature. */
export function rateEffects(network: Network, temperatureK: number, parameter: RateParameter): RateEffect[] {
	const { step } = parameter;
	const perEnergy = -inverseTemperatureGap(temperatureK, network.referenceTemperatureK) / GAS_CONSTANT;
	const throughEquilibrium = network.steps[step]?.reverse?.form === 'equilibrium';
	switch (parameter.kind) {
		case 'ln equilibrium':
			return throughEquilibrium ? [{ step, direction: 'reverse', perUnit: -1 }] : [];
		case 'enthalpy':
			return throughEquilibrium ? [{ step, direction: 'reverse', perUnit: -perEnergy }] : [];
		default: {
			const perUnit = parameter.kind === 'energy' ? perEnergy : 1;
			if (parameter.direction === 'reverse')
				return network.steps[step]?.reverse && !throughEquilibrium
					? [{ step, direction: 'reverse', perUnit }]
					: [];
			const forward: RateEffect = { step, direction: 'forward', perUnit };
			return throughEquilibrium ? [forward, { step, direction: 'reverse', perUnit }] : [forward];
		}
	}
}
