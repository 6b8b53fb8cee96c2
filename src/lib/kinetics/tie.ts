/**
 * Closing a loop: the constant that Wegscheider's condition asks for.
 *
 * Round a loop of reversible steps the product of forward constants equals that of the reverse ones. Given all but one, the
 * last follows; with activation energies and enthalpies the same holds for their sums, so that the loop is closed at every
 * temperature:
 *
 *     k_j = Π k_against / Π k_along (others),   Ea_j = Σ Ea_against − Σ Ea_along (others)
 *
 * Source: R. Wegscheider, Monatsh. Chem. 22 (1901) 849.
 */
import { reversibleCycles } from './cycles';
import { constantAt, excessFactor, rateConstants } from './rate-laws';
import type { Conditions, Network, RateLaw } from './types';

export interface LoopTie {
	stepId: string;
	direction: 'forward' | 'reverse';
	/** Constant that closes the loop under the conditions, 1/s. */
	requiredPerS: number;
	presentPerS: number;
	/** k_ref that gives it with `requiredEnergyJPerMol`, 1/s (per (mol/L)^order of species in excess). */
	requiredKRef: number;
	/**
	 * Energy that closes the loop at every temperature, J/mol; null where a law of the loop goes through an equilibrium constant
	 * or mixes Arrhenius and Eyring forms.
	 */
	requiredEnergyJPerMol: number | null;
	/** Product along the loop over the product against it, now. */
	ratio: number;
	/** Steps of the loop. */
	loop: string[];
}

/**
 * What one constant of a loop has to be. By default the closing step's reverse direction is tied.
 * @param stepId step whose constant follows; the loop through it is used
 * @throws RangeError when the step lies on no loop of reversible steps, or its direction goes through an equilibrium constant
 */
export function tieLoop(
	network: Network,
	conditions: Conditions,
	stepId: string,
	direction: 'forward' | 'reverse' = 'reverse'
): LoopTie {
	const constants = rateConstants(network, conditions);
	const index = network.steps.findIndex((step) => step.id === stepId);
	const step = network.steps[index];
	const cycle = reversibleCycles(network, constants).find((c) => c.steps.some((s) => s.index === index));
	if (!step || !cycle)
		throw new RangeError(`Step ${stepId} lies on no loop of reversible steps with constants above zero.`);
	const law = direction === 'forward' ? step.forward : step.reverse;
	if (!law || law.form === 'equilibrium')
		throw new RangeError(
			`The ${direction} constant of step ${stepId} is given through an equilibrium constant. Tie a constant that is given directly.`
		);
	const present = constants[direction][index];
	const { sense } = cycle.steps.find((s) => s.index === index)!;
	// ln ratio = Σ sense (ln k_f − ln k_r); this direction enters with `sign`.
	const sign = sense * (direction === 'forward' ? 1 : -1);
	const required = present * Math.exp(-sign * Math.log(cycle.ratio));
	const energy = requiredEnergy(network, cycle.steps, index, direction, sign);
	const withEnergy: RateLaw = energy === null ? law : { ...law, energyJPerMol: energy };
	const excess = excessFactor(law, conditions);
	const perKRef = constantAt(
		{ ...withEnergy, kRefPerS: 1 },
		conditions.temperatureK,
		network.referenceTemperatureK
	);
	return {
		stepId,
		direction,
		requiredPerS: required,
		presentPerS: present,
		requiredKRef: required / excess / perKRef,
		requiredEnergyJPerMol: energy,
		ratio: cycle.ratio,
		loop: cycle.steps.map((s) => s.stepId)
	};
}

function requiredEnergy(
	network: Network,
	steps: { index: number; sense: 1 | -1 }[],
	tied: number,
	direction: 'forward' | 'reverse',
	sign: number
): number | null {
	let sum = 0;
	const forms = new Set<string>();
	for (const { index, sense } of steps) {
		const { forward, reverse } = network.steps[index];
		if (!reverse || reverse.form === 'equilibrium') return null;
		forms.add(forward.form).add(reverse.form);
		const along = index === tied && direction === 'forward' ? 0 : forward.energyJPerMol;
		const against = index === tied && direction === 'reverse' ? 0 : reverse.energyJPerMol;
		sum += sense * (along - against);
	}
	return forms.size === 1 ? -sum / sign : null;
}

/** The network with that constant (and energy, where it is known) put in; the original stays as it is. */
export function withTie(network: Network, tie: LoopTie): Network {
	return {
		...network,
		steps: network.steps.map((step) => {
			if (step.id !== tie.stepId) return step;
			const law = (tie.direction === 'forward' ? step.forward : step.reverse) as RateLaw;
			const changed: RateLaw = {
				...law,
				kRefPerS: tie.requiredKRef,
				energyJPerMol: tie.requiredEnergyJPerMol ?? law.energyJPerMol
			};
			return tie.direction === 'forward' ? { ...step, forward: changed } : { ...step, reverse: changed };
		})
	};
}
