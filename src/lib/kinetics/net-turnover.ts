/**
 * Net turnover of every step from the gross turnover of the irreversible ones and the change of every species, by balances.
 *
 *     Δn_i = Σ_j ν_ij net_j
 *
 * Gross flows through a fast equilibrium are many orders larger than the net one, which would be lost in their difference. The
 * reversible steps are therefore settled by balances: where they form no loop, a species that touches only one unsettled step
 * gives its net from what else came and went, and so on (leaf by leaf). Only steps on a loop use the difference of gross flows.
 * All of it is linear, so that derivatives of gross turnovers and changes give the derivatives of the nets.
 *
 * | symbol | name here |
 * | --- | --- |
 * | Δn_i | `change[i]`, mol/L (or its derivative) |
 * | net_j | the result, NaN where it cannot be told |
 *
 * Source: leaf elimination on the forest of reversible steps; the balance is the law of conservation of the amounts.
 */
import type { Network } from './types';

export interface GrossTurnover {
	forward: number;
	reverse: number;
}

/**
 * @param gross turnover of each step as forward and reverse; those of steps that are `reversible` are used on loops alone
 * @param change of each species, in species order
 */
export function netTurnover(
	network: Network,
	gross: readonly GrossTurnover[],
	reversible: readonly boolean[],
	change: Float64Array
): number[] {
	const index = new Map(network.species.map((species, i) => [species.id, i]));
	const balance = change.slice();
	const net = gross.map(({ forward }, j) => (reversible[j] ? NaN : forward));
	network.steps.forEach((step, j) => {
		if (!Number.isNaN(net[j])) settle(balance, step, index, net[j]);
	});
	settleLeaves(network, index, net, balance);
	return net.map((value, j) => {
		const { forward, reverse } = gross[j];
		return Number.isNaN(value) && Number.isFinite(forward) ? forward - reverse : value;
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
