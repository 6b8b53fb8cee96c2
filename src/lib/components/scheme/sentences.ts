/** Rate constants in words, so that a wrong unit is heard before it is used. */
import { duration, roundToError, significant } from '$lib/client/numbers';
import { componentsOf } from '$lib/kinetics/components';
import type { LinearSystem, Mode, Network, RateConstants, Solution, Step } from '$lib/kinetics';

const LN2 = Math.LN2;

/** What one step does, at the conditions of `constants`. */
export function stepSentence(
	network: Network,
	step: Step,
	constants: RateConstants,
	system: LinearSystem
): string {
	const i = network.steps.indexOf(step);
	const forward = constants.forward[i];
	const reverse = constants.reverse[i];
	const product = step.products[0]?.species;
	if (step.reverse && product) {
		if (!(forward + reverse > 0)) return 'Nothing moves: both constants are zero.';
		const settles = reverse > 0 ? significant(forward / reverse, 3) : '∞';
		return `Settles at ${product} / ${step.reactant} = ${settles}, half the way in ${duration(LN2 / (forward + reverse))}.`;
	}
	if (!(forward > 0)) return `${step.reactant} does not react: the constant is zero.`;
	const from = network.species.findIndex((s) => s.id === step.reactant);
	const out = system.outflow[from];
	const half = duration(LN2 / forward);
	if (out > forward * (1 + 1e-9))
		return `By this step alone half of ${step.reactant} would be gone in ${half}; it takes ${significant((100 * forward) / out, 3)} % of what leaves ${step.reactant}.`;
	const verb = step.products.length === 0 ? 'lost' : 'gone';
	return `Half of ${step.reactant} is ${verb} in ${half}.`;
}

/** A list in words: A; A and B; A, B and C. */
export function inWords(list: readonly string[]): string {
	if (list.length < 2) return list[0] ?? '';
	return `${list.slice(0, -1).join(', ')} and ${list[list.length - 1]}`;
}

/**
 * What a mode is about: "A goes, B comes", or "B and C settle" for a reversible part.
 * A mode belongs to the loop (or the one species) that is furthest upstream among those with an amplitude: everything
 * upstream of it does not know of it, everything downstream merely follows.
 */
export function modeWords(network: Network, solution: Solution, mode: Mode): string {
	const n = network.species.length;
	const size = Float64Array.from({ length: n }, (_, s) =>
		Math.max(...mode.amplitudes.map((a) => Math.abs(a[s])))
	);
	const largest = Math.max(...size);
	const total = solution.charge.reduce((sum, c) => sum + c, 0);
	if (!(largest > 1e-9 * total)) return 'not stirred by this charge';
	const successors = successorsOf(network);
	const { blocks } = componentsOf(successors);
	const home = blocks.find((block) => block.some((s) => size[s] > 1e-6 * largest));
	if (!home) return '';
	const members = Array.from(home);
	const names = members.map((s) => network.species[s].id);
	if (mode.im !== 0) return `${inWords(names)} swing about their end`;
	if (members.length > 1) {
		const leaks =
			members.some((s) => successors[s].some((to) => !members.includes(to))) || losesAny(network, names);
		const slowest = !solution.modes.some(
			(m) =>
				m.halfLifeS > mode.halfLifeS &&
				Number.isFinite(m.halfLifeS) &&
				members.some((s) => m.amplitudes.some((a) => Math.abs(a[s]) > 1e-6 * largest)) &&
				blocks.find((block) =>
					block.some((s) => m.amplitudes.some((a) => Math.abs(a[s]) > 1e-6 * largest))
				) === home
		);
		return leaks && slowest ? `${inWords(names)} go together` : `${inWords(names)} settle`;
	}
	const comes = [...new Set(successors[members[0]])].map((s) => network.species[s].id);
	const rest = mode.multiplicity > 1 ? ', with others as fast' : '';
	if (comes.length === 0) return `${names[0]} goes${rest}`;
	return `${names[0]} goes, ${inWords(comes)} ${comes.length > 1 ? 'come' : 'comes'}${rest}`;
}

function successorsOf(network: Network): number[][] {
	const index = new Map(network.species.map((s, i) => [s.id, i]));
	const successors: number[][] = network.species.map(() => []);
	for (const step of network.steps) {
		const from = index.get(step.reactant);
		if (from === undefined) continue;
		for (const p of step.products) {
			const to = index.get(p.species);
			if (to === undefined) continue;
			successors[from].push(to);
			if (step.reverse) successors[to].push(from);
		}
	}
	return successors;
}

const losesAny = (network: Network, names: string[]): boolean =>
	network.steps.some((step) => step.products.length === 0 && names.includes(step.reactant));

/** "A + B + C stays at 0.500 mol/L." */
export function totalSentence(name: string, total: number | undefined): string {
	return total === undefined
		? `${name} stays what it is.`
		: `${name} stays at ${roundToError(total, null, 3)} mol/L.`;
}
