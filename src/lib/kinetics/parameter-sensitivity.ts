/**
 * Sensitivities by the parameters that people know (k_ref, Ea, K, ΔH°, concentrations in excess, orders, temperature), from
 * those by the logarithm of each constant.
 *
 *     ∂y/∂θ = Σ_d (∂ ln k_d/∂θ) ∂y/∂ln k_d                (chain rule; effects in `rate-parameters.ts`)
 *
 * Whatever follows from the constants of one set of conditions (curves, integrals, tanks, residence-time tables, amounts in a
 * dosed batch) is differentiated by every step-direction first; `byParameters` then folds the directions together.
 *
 * | symbol | name here |
 * | --- | --- |
 * | ∂y/∂ln k_d | block d of `byFlow`, then blocks of `byCharge` |
 * | ∂ ln k_d/∂θ | `chainWeights` |
 *
 * Source: the chain rule; for the inner derivatives see `sensitivity.ts`.
 */
import { linearSystem } from './linear-system';
import { rateConstants } from './rate-laws';
import { chainWeights, type FirstOrderParameter } from './rate-parameters';
import { sensitivities, type SensitivityParameter, type SensitivityResult } from './sensitivity';
import type { Conditions, LinearSystem, Network } from './types';

/** Every step-direction of a system that carries anything, then every species' charge: what `foldParameters` expects. */
export function innerParameters(system: LinearSystem, species = system.n): SensitivityParameter[] {
	const rates = (system.flows ?? []).map(({ step, direction }) => ({
		kind: 'rate' as const,
		step,
		direction
	}));
	const charges = Array.from({ length: species }, (_, i) => ({ kind: 'charge' as const, species: i }));
	return [...rates, ...charges];
}

/**
 * Folds derivatives by `innerParameters` (blocks of `size` numbers each) into derivatives by the parameters asked for.
 * @returns out[p·size + i]
 */
export function foldParameters(
	network: Network,
	system: LinearSystem,
	conditions: Conditions,
	inner: Float64Array,
	size: number,
	parameters: readonly FirstOrderParameter[]
): Float64Array {
	const flows = system.flows?.length ?? 0;
	const out = new Float64Array(parameters.length * size);
	const add = (p: number, block: number, weight: number) => {
		if (weight === 0) return;
		for (let i = 0; i < size; i++) out[p * size + i] += weight * inner[block * size + i];
	};
	parameters.forEach((parameter, p) => {
		if (parameter.kind === 'charge') return add(p, flows + parameter.species, 1);
		chainWeights(network, system, conditions, parameter).forEach((weight, d) => add(p, d, weight));
	});
	return out;
}

/**
 * Curves of a batch under constant conditions and their derivatives by any parameter of the network.
 * @returns shapes as in `SensitivityResult`; per unit of each parameter
 */
export function parameterSensitivities(
	network: Network,
	conditions: Conditions,
	charge: ArrayLike<number>,
	timesS: ArrayLike<number>,
	parameters: readonly FirstOrderParameter[]
): SensitivityResult {
	const system = linearSystem(network, rateConstants(network, conditions));
	const { curves, derivatives } = sensitivities(system, charge, timesS, innerParameters(system));
	const size = timesS.length * system.n;
	return {
		curves,
		derivatives: foldParameters(network, system, conditions, derivatives, size, parameters)
	};
}
