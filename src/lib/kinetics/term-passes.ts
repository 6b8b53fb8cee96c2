/**
 * How the terms of a closed form are arranged for summing (`term-sums.ts`).
 *
 * Three species by up to three modes make a pass: twelve numbers stay in registers, and each factor is read once for three
 * species. Species with few terms go together, so that few zeros are multiplied; one or two that are left over and have one mode
 * (a reactant, its first product) ride along with a first pass that reads this mode anyway.
 */
import type { ClosedForm } from './closed-form';

/** Terms of a pass: three amplitudes a species by mode, three constants, then amplitude and constant of the riders. */
export const TERMS = 16;
export const CONSTANTS = 9;
export const RIDERS = 12;

export interface Pass {
	/** The first of three species and how far the others stand from it; 0 or the same again where there are fewer. */
	s: number;
	p: number;
	q: number;
	/** Three modes; the first again, with amplitudes of zero, where there are fewer. */
	modes: number[];
	/** Whether only the first mode counts. */
	single: boolean;
	/** Whether the sums are added to those of an earlier pass. */
	adds: boolean;
	terms: Float64Array;
	riders: Riders | null;
}

/** Two species of the pass's first mode alone, or one twice: how far they stand from its first species. */
export interface Riders {
	u: number;
	v: number;
}

/** All passes of a closed form, in the order in which they have to be taken. */
export function passesOf(form: ClosedForm): Pass[] {
	const { n } = form;
	const order = byNumberOfTerms(form);
	const odd = n % 3;
	const left = order.slice(0, odd);
	const passes: Pass[] = [];
	for (let from = odd; from < n; from += 3) addTile(form, order.slice(from, from + 3), passes);
	if (odd > 0 && !(passes.length > 0 && rides(form, left, passes[0]))) addTile(form, left, passes);
	return passes;
}

function byNumberOfTerms({ n, width, amplitudes, re }: ClosedForm): number[] {
	const terms = new Int32Array(n);
	const order: number[] = [];
	for (let s = 0, at = 0; s < n; s++) {
		for (let l = 0; l < width; l++, at++) if (re[l] !== 0 && amplitudes[at] !== 0) terms[s]++;
		order.push(s);
	}
	return order.sort((a, b) => terms[a] - terms[b]);
}

/** Modes of a rate that some of the species have. */
function modesOf({ width, amplitudes, re }: ClosedForm, species: number[]): number[] {
	const modes: number[] = [];
	for (let l = 0; l < width; l++) {
		if (re[l] === 0) continue;
		let found = false;
		for (const s of species) if (amplitudes[s * width + l] !== 0) found = true;
		if (found) modes.push(l);
	}
	return modes;
}

/** All passes of one to three species. */
function addTile(form: ClosedForm, species: number[], passes: Pass[]): void {
	const last = species.length - 1;
	const three = [species[0], species[Math.min(1, last)], species[last]];
	const modes = modesOf(form, species);
	const first = passOf(form, three, modes.slice(0, 3), false);
	three.forEach((s, i) => (first.terms[CONSTANTS + i] = constantOf(form, s)));
	passes.push(first);
	for (let k = 3; k < modes.length; k += 3) passes.push(passOf(form, three, modes.slice(k, k + 3), true));
}

function constantOf({ width, amplitudes, re }: ClosedForm, species: number): number {
	let sum = 0;
	for (let l = 0; l < width; l++) if (re[l] === 0) sum += amplitudes[species * width + l];
	return sum;
}

function passOf({ width, amplitudes }: ClosedForm, species: number[], modes: number[], adds: boolean): Pass {
	const terms = new Float64Array(TERMS);
	const three = [modes[0] ?? 0, modes[1] ?? modes[0] ?? 0, modes[2] ?? modes[0] ?? 0];
	for (let k = 0; k < modes.length; k++)
		for (let i = 0; i < 3; i++) terms[3 * i + k] = amplitudes[species[i] * width + modes[k]];
	const [s, second, third] = species;
	return {
		s,
		p: second - s,
		q: third - s,
		modes: three,
		single: modes.length < 2,
		adds,
		terms,
		riders: null
	};
}

/** Lets one or two species ride along, where their only mode is one of the pass's; it becomes its first. */
function rides(form: ClosedForm, species: number[], pass: Pass): boolean {
	const modes = modesOf(form, species);
	const at = pass.modes.indexOf(modes[0]);
	if (modes.length !== 1 || at < 0 || pass.single) return false;
	toFront(pass, at);
	const riders = [species[0], species[species.length - 1]];
	riders.forEach((s, i) => {
		pass.terms[RIDERS + 2 * i] = form.amplitudes[s * form.width + modes[0]];
		pass.terms[RIDERS + 2 * i + 1] = constantOf(form, s);
	});
	pass.riders = { u: riders[0] - pass.s, v: riders[1] - pass.s };
	return true;
}

function toFront({ modes, terms }: Pass, at: number): void {
	[modes[0], modes[at]] = [modes[at], modes[0]];
	for (let i = 0; i < CONSTANTS; i += 3) [terms[i], terms[i + at]] = [terms[i + at], terms[i]];
}
