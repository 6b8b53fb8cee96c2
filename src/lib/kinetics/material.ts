/**
 * The material map: how much goes through each step, until a time or until the end, and the heat that it releases.
 *
 *     forward_j = k_j ∫ c_reactant dt,   net_j = forward_j − reverse_j,   heat = Σ (−ΔH_j) net_j
 *
 * The net of reversible steps comes from balances, not from that difference (`net-turnover.ts`). Derivatives:
 * `material-sensitivity.ts`.
 *
 * | symbol | name here |
 * | --- | --- |
 * | ∫c dt | `integral`, mol/L·s; until the end from the elimination of `final-composition.ts` |
 * | ΔH_j | `enthalpiesJPerMol[j]`, per mole of the step as written; null: not known |
 *
 * Source: the integral form of the balance of each species; O. Levenspiel, Chemical Reaction Engineering, 3rd ed. (1999), ch. 3.
 */
import { finalComposition } from './final-composition';
import { netTurnover } from './net-turnover';
import { solve } from './solve';
import type { LinearSystem, Network, Solution } from './types';

export interface StepMaterial {
	stepId: string;
	/** Gross turnover, mol/L; Infinity for a step that stays in equilibrium for ever. */
	forward: number;
	reverse: number;
	/** forward − reverse, mol/L. NaN where it cannot be told (a loop of steps that never rests). */
	net: number;
	/** net as a share of the charge, %. */
	percentOfCharge: number;
}

/**
 * Turnover of every step from the charge to `timeS` (Infinity: until the end).
 * @param system the flows of `network` under the conditions in question
 */
export function materialMap(
	network: Network,
	system: LinearSystem,
	charge: ArrayLike<number>,
	timeS = Infinity
): StepMaterial[] {
	const { n } = system;
	const total = Array.from(charge).reduce((sum, c) => sum + c, 0);
	let integral: Float64Array;
	let end: Float64Array;
	if (timeS === Infinity) {
		const found = finalComposition(system, charge);
		integral = found.throughput;
		end = found.final;
	} else {
		const solution = solve(system, charge);
		integral = solution.integral(timeS);
		end = solution.at(timeS);
	}
	const gross = network.steps.map(() => ({ forward: 0, reverse: 0 }));
	const reversible = network.steps.map(() => false);
	for (const { step, direction, from, rate } of system.flows ?? []) {
		gross[step][direction] = integral[from] === 0 ? 0 : rate * integral[from];
		if (direction === 'reverse' && gross[step].reverse !== 0) reversible[step] = true;
	}
	const change = Float64Array.from({ length: n }, (_, i) => end[i] - charge[i]);
	const net = netTurnover(network, gross, reversible, change);
	return network.steps.map((step, j) => ({
		stepId: step.id,
		...gross[j],
		net: net[j],
		percentOfCharge: (100 * net[j]) / total
	}));
}

/** A figure that is null where an enthalpy that matters is not known. */
export type HeatFigure = number | null;

/**
 * Heat released per litre until then, J/L, from step enthalpies (negative: exothermic) in step order.
 * Null as soon as a step with turnover has no enthalpy.
 */
export function heatReleased(
	map: readonly StepMaterial[],
	enthalpiesJPerMol: readonly (number | null)[]
): HeatFigure {
	let heat = 0;
	for (let j = 0; j < map.length; j++) {
		if (map[j].net === 0) continue;
		const enthalpy = enthalpiesJPerMol[j];
		if (enthalpy === null || enthalpy === undefined || Number.isNaN(map[j].net)) return null;
		heat -= enthalpy * map[j].net;
	}
	return heat;
}

/** Heat release rate at a time, W/L; null as for `heatReleased`. */
export function heatReleaseRate(
	system: LinearSystem,
	solution: Pick<Solution, 'at'>,
	timeS: number,
	enthalpiesJPerMol: readonly (number | null)[]
): HeatFigure {
	const c = solution.at(timeS);
	let rate = 0;
	for (const flow of system.flows ?? []) {
		const turnover = flow.rate * c[flow.from];
		if (turnover === 0) continue;
		const enthalpy = enthalpiesJPerMol[flow.step];
		if (enthalpy === null || enthalpy === undefined) return null;
		rate -= (flow.direction === 'forward' ? 1 : -1) * enthalpy * turnover;
	}
	return rate;
}
