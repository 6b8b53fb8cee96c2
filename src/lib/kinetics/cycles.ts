/**
 * Wegscheider's condition: round every loop of reversible steps the product of the forward constants equals the product of
 * the reverse ones; otherwise the scheme would turn round for ever at equilibrium.
 *
 *     ratio = Π k_forward / Π k_reverse round the loop = 1
 *
 * One loop is reported for every reversible step outside a spanning tree: these are independent and span all loops.
 * Irreversible loops (A → B → C → A) have no such ratio; they are reported as driven from outside.
 *
 * Sources: R. Wegscheider, Monatsh. Chem. 22 (1901) 849; J. Schnakenberg, Rev. Mod. Phys. 48 (1976) 571 (loops of a tree).
 */
import { componentsOf } from './components';
import { rateConstants } from './rate-laws';
import type { Conditions, Network, NetworkIssue, RateConstants } from './types';

/** |ln ratio| below which a loop counts as balanced: rounding of the constants as stored. */
const BALANCED = 1e-9;
/** |ln ratio| up to which a broken loop is only noted: constants given to a few digits. */
const FEW_DIGITS = 0.01;

export interface ReversibleCycle {
	/** Steps round the loop, the closing one first, with the sense in which the loop passes them. */
	steps: { index: number; stepId: string; sense: 1 | -1 }[];
	/** Product of constants along the loop over the product against it. */
	ratio: number;
}

interface Edge {
	index: number;
	a: number;
	b: number;
}

/** Independent loops of reversible one-to-one steps, with Wegscheider's ratio under the given constants. */
export function reversibleCycles(network: Network, constants: RateConstants): ReversibleCycle[] {
	const index = new Map(network.species.map((species, i) => [species.id, i]));
	const edges: Edge[] = [];
	network.steps.forEach((step, i) => {
		const a = index.get(step.reactant);
		const b = step.products.length === 1 ? index.get(step.products[0].species) : undefined;
		if (a !== undefined && b !== undefined && constants.forward[i] > 0 && constants.reverse[i] > 0)
			edges.push({ index: i, a, b });
	});
	const tree: Edge[] = [];
	return edges.flatMap((edge) => {
		const back = pathBetween(tree, edge.b, edge.a);
		if (!back) {
			tree.push(edge);
			return [];
		}
		const round = [{ edge, sense: 1 as 1 | -1 }, ...back];
		const logRatio = round.reduce(
			(sum, { edge: e, sense }) =>
				sum + sense * Math.log(constants.forward[e.index] / constants.reverse[e.index]),
			0
		);
		const steps = round.map(({ edge: e, sense }) => ({
			index: e.index,
			stepId: network.steps[e.index].id,
			sense
		}));
		return [{ steps, ratio: Math.exp(logRatio) }];
	});
}

function pathBetween(tree: Edge[], start: number, goal: number): { edge: Edge; sense: 1 | -1 }[] | null {
	const reachedBy = new Map<number, { edge: Edge; sense: 1 | -1; before: number } | null>([[start, null]]);
	const queue = [start];
	for (const at of queue)
		for (const edge of tree) {
			const sense = edge.a === at ? 1 : edge.b === at ? -1 : 0;
			const next = edge.a === at ? edge.b : edge.a;
			if (sense === 0 || reachedBy.has(next)) continue;
			reachedBy.set(next, { edge, sense, before: at });
			queue.push(next);
		}
	if (!reachedBy.has(goal)) return null;
	const path: { edge: Edge; sense: 1 | -1 }[] = [];
	for (let hop = reachedBy.get(goal); hop; hop = reachedBy.get(hop.before)) path.unshift(hop);
	return path.map(({ edge, sense }) => ({ edge, sense }));
}

/**
 * The reverse constant of the loop's closing step, 1/s, that restores detailed balance with all other constants as they are:
 * what "tie the last constant of the loop" sets.
 */
export function balancingReverse({ steps, ratio }: ReversibleCycle, constants: RateConstants): number {
	return constants.reverse[steps[0].index] * ratio;
}

/** Issues for loops that break detailed balance, and for loops with an irreversible step. */
export function cycleIssues(network: Network, conditions?: Conditions): NetworkIssue[] {
	const constants = constantsFor(network, conditions);
	const issues: NetworkIssue[] = [];
	for (const { steps, ratio } of reversibleCycles(network, constants)) {
		const size = Math.abs(Math.log(ratio));
		if (size <= BALANCED) continue;
		const names = steps.map((step) => step.stepId).join(', ');
		issues.push({
			level: size <= FEW_DIGITS ? 'note' : 'caution',
			code: 'detailed-balance-broken',
			message: `The constants round the loop ${names} break detailed balance: forward over reverse is ${ratio.toPrecision(4)}, expected 1. Tie one of them to the others.`,
			stepId: steps[0].stepId,
			ratio
		});
	}
	issues.push(...irreversibleLoops(network));
	return issues;
}

/** Without conditions the reference temperature is taken and excess factors are left out (set to 1 mol/L). */
function constantsFor(network: Network, conditions?: Conditions): RateConstants {
	if (conditions) return rateConstants(network, conditions);
	const excessMolPerL: Record<string, number> = {};
	for (const step of network.steps) {
		for (const entry of step.forward.excess) excessMolPerL[entry.species] = 1;
		if (step.reverse && step.reverse.form !== 'equilibrium')
			for (const entry of step.reverse.excess) excessMolPerL[entry.species] = 1;
	}
	return rateConstants(network, { temperatureK: network.referenceTemperatureK, excessMolPerL });
}

function irreversibleLoops(network: Network): NetworkIssue[] {
	const index = new Map(network.species.map((species, i) => [species.id, i]));
	const successors: number[][] = network.species.map(() => []);
	for (const step of network.steps)
		for (const product of step.products) {
			successors[index.get(step.reactant)!].push(index.get(product.species)!);
			if (step.reverse) successors[index.get(product.species)!].push(index.get(step.reactant)!);
		}
	const { blockOf } = componentsOf(successors);
	return network.steps
		.filter(
			(step) =>
				!step.reverse &&
				step.products.some((p) => blockOf[index.get(p.species)!] === blockOf[index.get(step.reactant)!])
		)
		.map((step) => ({
			level: 'caution' as const,
			code: 'detailed-balance-broken' as const,
			message: `Step ${step.id} is irreversible but lies on a loop: such a loop needs something outside the scheme to drive it.`,
			stepId: step.id
		}));
}
