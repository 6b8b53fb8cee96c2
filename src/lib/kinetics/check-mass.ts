/**
 * Mass that a step gains or loses, and loops whose products multiply.
 *
 *     gap = Σ ν_i M_i − M_reactant,  reported beyond 1e-3 of M_reactant unless a species in excess carries it
 *     A → 2 B, B → A multiplies by 2 round the loop: no bounded solution (`block-weights.ts`)
 *
 * | symbol | name here |
 * | --- | --- |
 * | M | `molarMassGPerMol` |
 * | ν | `Product.coefficient` |
 *
 * Source: conservation of mass; A. Berman and R. J. Plemmons, Nonnegative Matrices in the Mathematical Sciences, SIAM 1994, ch. 6.
 */
import { blockWeights } from './block-weights';
import { stop } from './check-issue';
import { components } from './components';
import { linearSystem } from './linear-system';
import type { Network, NetworkIssue, Step } from './types';

/** Relative mass that a step may lose or gain before it is reported: rounding of molar masses. */
const MASS_TOLERANCE = 1e-3;

/** Loops whose products multiply have no bounded solution. Constants are set to 1: only the coefficients matter. */
export function growthIssues(network: Network): NetworkIssue[] {
	const ones = Float64Array.from(network.steps, () => 1);
	const reverse = Float64Array.from(network.steps, (step) => (step.reverse ? 1 : 0));
	const system = linearSystem(network, { forward: ones, reverse });
	try {
		blockWeights(system, components(system));
		return [];
	} catch (error) {
		return [stop('coefficient-invalid', (error as Error).message, {})];
	}
}

export function massIssues(network: Network, step: Step): NetworkIssue[] {
	const mass = (id: string) => network.species.find((species) => species.id === id)?.molarMassGPerMol;
	const before = mass(step.reactant);
	if (before === undefined || step.products.length === 0) return [];
	let after = 0;
	for (const product of step.products) {
		const own = mass(product.species);
		if (own === undefined) return [];
		after += own * product.coefficient;
	}
	const gap = after - before;
	const carried = step.forward.excess.some(
		({ species }) => Math.abs((mass(species) ?? NaN) - gap) <= MASS_TOLERANCE * before
	);
	if (Math.abs(gap) <= MASS_TOLERANCE * before || carried) return [];
	const verb = gap > 0 ? 'gains' : 'loses';
	const message = `Step ${step.id} ${verb} ${Math.abs(gap).toFixed(2)} g/mol (${before.toFixed(2)} before, ${after.toFixed(2)} after). Is a reagent or by-product missing from the step?`;
	return [{ level: 'caution', code: 'mass-imbalance', message, stepId: step.id }];
}
