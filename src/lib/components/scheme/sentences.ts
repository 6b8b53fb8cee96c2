/** Rate constants in words, so that a wrong unit is heard before it is used. */
import { duration, roundToError, significant } from '$lib/client/numbers';
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

const VISIBLE = 0.05;

/** Which species move with a mode: "A goes, B comes", or "B and C settle" where neither runs out. */
export function modeWords(network: Network, solution: Solution, mode: Mode): string {
	const n = network.species.length;
	const size = Float64Array.from({ length: n }, (_, s) =>
		Math.max(...mode.amplitudes.map((a) => Math.abs(a[s])))
	);
	const largest = Math.max(...size);
	const total = solution.charge.reduce((sum, c) => sum + c, 0);
	if (!(largest > 1e-9 * total)) return 'not stirred by this charge';
	const moving = network.species
		.map((s, i) => ({ id: s.id, i }))
		.filter(({ i }) => size[i] >= VISIBLE * largest);
	const names = moving.map((m) => m.id);
	if (mode.im !== 0) return `${inWords(names)} swing about their end`;
	if (mode.multiplicity > 1) return `${inWords(names)}, equal rates together`;
	const first = mode.amplitudes[0];
	const goes = moving.filter(({ i }) => first[i] > 0);
	const comes = moving.filter(({ i }) => first[i] < 0).map((m) => m.id);
	const settles =
		goes.length > 0 && goes.every(({ i }) => solution.final[i] > 0.01 * total) && comes.length > 0;
	if (settles) return `${inWords(names)} settle`;
	const parts: string[] = [];
	const left = goes.map((m) => m.id);
	if (left.length) parts.push(`${inWords(left)} ${left.length > 1 ? 'go' : 'goes'}`);
	if (comes.length) parts.push(`${inWords(comes)} ${comes.length > 1 ? 'come' : 'comes'}`);
	return parts.join(', ');
}

/** "A + B + C stays at 0.500 mol/L." */
export function totalSentence(name: string, total: number | undefined): string {
	return total === undefined
		? `${name} stays what it is.`
		: `${name} stays at ${roundToError(total, null, 3)} mol/L.`;
}
