/**
 * Rate constants of every step under one set of conditions.
 *
 *     Arrhenius   k(T) = k_ref · exp(−Ea/R · (1/T − 1/T_ref)) · Π [X]^m
 *     Eyring      k(T) = k_ref · (T/T_ref) · exp(−ΔH‡/R · (1/T − 1/T_ref)) · Π [X]^m
 *     reverse     k_reverse = k_forward / K,  K(T) = K_ref · exp(−ΔH°/R · (1/T − 1/T_ref))   (van 't Hoff)
 *
 * | symbol | name here |
 * | --- | --- |
 * | k_ref | `RateLaw.kRefPerS` |
 * | Ea or ΔH‡ | `RateLaw.energyJPerMol` |
 * | [X], m | `Conditions.excessMolPerL`, `ExcessOrder.order` |
 * | K_ref, ΔH° | `EquilibriumLaw.kEqRef`, `EquilibriumLaw.enthalpyJPerMol` |
 *
 * A reference temperature inside the studied range keeps k_ref and Ea nearly uncorrelated: M. Schwaab and J. C. Pinto,
 * Chem. Eng. Sci. 62 (2007) 2750. Eyring: H. Eyring, J. Chem. Phys. 3 (1935) 107.
 */
import type { Conditions, Network, RateConstants, RateLaw, Step } from './types';

/** Molar gas constant, J/(mol·K): exact since the 2019 revision of the SI (CODATA 2018). */
export const GAS_CONSTANT = 8.31446261815324;
/** Boltzmann constant over Planck constant, 1/(s·K), both exact in the SI of 2019. */
export const BOLTZMANN_OVER_PLANCK = 1.380649e-23 / 6.62607015e-34;

/** 1/T − 1/T_ref without cancellation, 1/K. */
export function inverseTemperatureGap(temperatureK: number, referenceK: number): number {
	return (referenceK - temperatureK) / (temperatureK * referenceK);
}

/** k(T) of one direction without its excess factor, in the unit of `kRefPerS`. */
export function constantAt(law: RateLaw, temperatureK: number, referenceK: number): number {
	if (law.kRefPerS === 0) return 0;
	const gap = inverseTemperatureGap(temperatureK, referenceK);
	const k = law.kRefPerS * Math.exp((-law.energyJPerMol / GAS_CONSTANT) * gap);
	return law.form === 'eyring' ? k * (temperatureK / referenceK) : k;
}

/** Π [X]^m over the species in excess. A missing concentration throws: it is never taken as 1. */
export function excessFactor(law: RateLaw, conditions: Conditions): number {
	let factor = 1;
	for (const { species, order } of law.excess) {
		const concentration = conditions.excessMolPerL[species];
		if (concentration === undefined || !(concentration >= 0))
			throw new RangeError(
				`The concentration of ${species}, in excess, is missing or not a number ≥ 0 mol/L.`
			);
		factor *= Math.pow(concentration, order);
	}
	return factor;
}

/** Reverse constant of a step, 1/s; 0 when it is not reversible. `forward` is the forward constant under the same conditions. */
export function reverseConstant(
	step: Step,
	forward: number,
	conditions: Conditions,
	referenceK: number
): number {
	if (!step.reverse) return 0;
	if (step.reverse.form !== 'equilibrium')
		return (
			constantAt(step.reverse, conditions.temperatureK, referenceK) * excessFactor(step.reverse, conditions)
		);
	const gap = inverseTemperatureGap(conditions.temperatureK, referenceK);
	const equilibrium = step.reverse.kEqRef * Math.exp((-step.reverse.enthalpyJPerMol / GAS_CONSTANT) * gap);
	return forward / equilibrium;
}

/**
 * Rate constants of every step, in step order, 1/s (pseudo-first-order where species in excess take part).
 * @throws RangeError when the temperature is not positive or the concentration of a species in excess is missing.
 */
export function rateConstants(network: Network, conditions: Conditions): RateConstants {
	if (!(conditions.temperatureK > 0) || !Number.isFinite(conditions.temperatureK))
		throw new RangeError(`A temperature above 0 K is expected; found ${conditions.temperatureK} K.`);
	const forward = new Float64Array(network.steps.length);
	const reverse = new Float64Array(network.steps.length);
	network.steps.forEach((step, i) => {
		forward[i] =
			constantAt(step.forward, conditions.temperatureK, network.referenceTemperatureK) *
			excessFactor(step.forward, conditions);
		reverse[i] = reverseConstant(step, forward[i], conditions, network.referenceTemperatureK);
	});
	return { forward, reverse };
}

/** Eyring: ΔS‡ in J/(mol·K) from the constant at the reference temperature (transmission coefficient 1, 1/s standard). */
export function activationEntropy(kRefPerS: number, enthalpyJPerMol: number, referenceK: number): number {
	return (
		GAS_CONSTANT *
		(Math.log(kRefPerS / (BOLTZMANN_OVER_PLANCK * referenceK)) +
			enthalpyJPerMol / (GAS_CONSTANT * referenceK))
	);
}

/** Eyring: constant at the reference temperature from ΔH‡ (J/mol) and ΔS‡ (J/(mol·K)), 1/s. */
export function eyringConstant(enthalpyJPerMol: number, entropyJPerMolK: number, referenceK: number): number {
	return (
		BOLTZMANN_OVER_PLANCK *
		referenceK *
		Math.exp(entropyJPerMolK / GAS_CONSTANT - enthalpyJPerMol / (GAS_CONSTANT * referenceK))
	);
}
