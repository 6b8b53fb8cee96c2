/**
 * The material map: how much goes through each step, until a time or until the end, and the heat that it releases.
 *
 *     forward_j = k_j ∫ c_reactant dt,   net_j = forward_j − reverse_j,   heat = Σ (−ΔH_j) net_j
 *
 * Gross flows through a fast equilibrium are many orders larger than the net one, which would then be lost in rounding. The
 * reversible steps are therefore settled by balances: where they form no loop, a species that touches only one unsettled step
 * gives its net from what else came and went, and so on (leaf by leaf). Only steps on a loop use the difference of gross flows.
 *
 * | symbol | name here |
 * | --- | --- |
 * | ∫c dt | `integral`, mol/L·s; until the end from the elimination of `final-composition.ts` |
 * | ΔH_j | `enthalpiesJPerMol[j]`, per mole of the step as written; null: not known |
 */
import { finalComposition } from './final-composition';
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
	const index = new Map(network.species.map((species, i) => [species.id, i]));
	const gross = network.steps.map(() => ({ forward: 0, reverse: 0 }));
	for (const { step, direction, from, rate } of system.flows ?? [])
		gross[step][direction] = integral[from] === 0 ? 0 : rate * integral[from];
	const net = gross.map(({ forward, reverse }) => (reverse === 0 ? forward : NaN));
	const balance = Float64Array.from({ length: n }, (_, i) => end[i] - charge[i]);
	network.steps.forEach((step, j) => {
		if (!Number.isNaN(net[j])) settle(balance, step, index, net[j]);
	});
	settleLeaves(network, index, net, balance);
	return network.steps.map((step, j) => {
		const { forward, reverse } = gross[j];
		const value = Number.isNaN(net[j]) && Number.isFinite(forward) ? forward - reverse : net[j];
		return { stepId: step.id, forward, reverse, net: value, percentOfCharge: (100 * value) / total };
	});
}

/** Takes a settled step out of the balances. */
function settle(
	balance: Float64Array,
	step: Network['steps'][number],
	index: Map<string, number>,
	net: number
): void {
	balance[index.get(step.reactant)!] += net;
	for (const { species, coefficient } of step.products) balance[index.get(species)!] -= coefficient * net;
}

function settleLeaves(
	network: Network,
	index: Map<string, number>,
	net: number[],
	balance: Float64Array
): void {
	const open = () => network.steps.map((_, j) => j).filter((j) => Number.isNaN(net[j]));
	for (let left = open(); left.length > 0; left = open()) {
		const touching = new Map<number, number[]>();
		for (const j of left) {
			const step = network.steps[j];
			for (const id of [step.reactant, step.products[0].species]) {
				const i = index.get(id)!;
				touching.set(i, [...(touching.get(i) ?? []), j]);
			}
		}
		const leaf = [...touching].find(([, steps]) => steps.length === 1);
		if (!leaf) return;
		const [i, [j]] = leaf;
		const step = network.steps[j];
		net[j] = index.get(step.reactant) === i ? -balance[i] : balance[i];
		if (net[j] === 0) net[j] = 0;
		settle(balance, step, index, net[j]);
	}
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
