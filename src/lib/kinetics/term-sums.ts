/**
 * Sums of a closed form's terms over many times: the innermost loop of every drawn curve.
 *
 *     c_s(t_j) = a_s0 + Σ_l a_sl E_l F_jl
 *
 * This is a product of a (times × modes) with a (modes × species) matrix, most of whose entries may be zero. It is taken in
 * passes of three species by up to three modes: twelve numbers stay in registers, and each factor F_jl is read once for
 * three species. Species with few terms go together, so that few zeros are multiplied; one or two that are left over and
 * have one mode (a reactant, its first product) ride along with a first pass that reads this mode anyway.
 *
 * | symbol | name here |
 * | --- | --- |
 * | a_s0 (sum over modes of rate zero), a_sl | `Pass.terms` |
 * | E_l, F_jl | `coarse[place + l]`, `fine[j·width + l]` |
 */
import type { ClosedForm } from './closed-form';

/** Terms of a pass: three amplitudes a species by mode, three constants, then amplitude and constant of the riders. */
const TERMS = 16;
const CONSTANTS = 9;
const RIDERS = 12;

interface Pass {
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
interface Riders {
	u: number;
	v: number;
}

/** Factors of the modes. */
export interface Factors {
	/** F by row and mode. */
	fine: Float64Array;
	/** E, the same for all rows, from coarse[place] on. */
	coarse: Float64Array;
	place: number;
}

/** Where a pass reads and writes. */
interface Place {
	fine: Float64Array;
	width: number;
	out: Float64Array;
	/** Index in `out` of the first row's first species. */
	offset: number;
	n: number;
	rows: number;
}

/** Terms times E of the pass at hand; written and read within one call. */
const scaled = new Float64Array(TERMS);

/** The terms of one closed form, arranged for summing. */
export class TermSums {
	private readonly passes: Pass[];

	constructor(private readonly form: ClosedForm) {
		this.passes = passesOf(form);
	}

	/** Writes rows × n values from out[offset] on. */
	write(factors: Factors, out: Float64Array, offset: number, rows: number): void {
		const { n, width } = this.form;
		const place = { fine: factors.fine, width, out, offset, n, rows };
		for (const pass of this.passes) {
			scale(pass, factors);
			if (pass.riders) writeFive(place, pass, pass.riders, scaled);
			else if (pass.single) (pass.adds ? addOne : writeOne)(place, pass, scaled);
			else (pass.adds ? addThree : writeThree)(place, pass, scaled);
		}
	}
}

function scale({ modes, terms, riders }: Pass, { coarse, place }: Factors): void {
	for (let k = 0; k < 3; k++) {
		const factor = coarse[place + modes[k]];
		for (let i = k; i < CONSTANTS; i += 3) scaled[i] = terms[i] * factor;
		scaled[CONSTANTS + k] = terms[CONSTANTS + k];
	}
	if (!riders) return;
	const factor = coarse[place + modes[0]];
	scaled[RIDERS] = terms[RIDERS] * factor;
	scaled[RIDERS + 1] = terms[RIDERS + 1];
	scaled[RIDERS + 2] = terms[RIDERS + 2] * factor;
	scaled[RIDERS + 3] = terms[RIDERS + 3];
}

function passesOf(form: ClosedForm): Pass[] {
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

function writeOne(
	{ fine, width, out, offset, n, rows }: Place,
	{ s, p, q, modes }: Pass,
	t: Float64Array
): void {
	const c = t[9],
		c1 = t[10],
		c2 = t[11];
	const a = t[0],
		b = t[3],
		d = t[6];
	for (let j = 0, at = modes[0], to = offset + s; j < rows; j++, at += width, to += n) {
		const f = fine[at];
		out[to] = c + a * f;
		out[to + p] = c1 + b * f;
		out[to + q] = c2 + d * f;
	}
}

/** A species that stands for itself again must not get its term twice: every sum is read before one is written. */
function addOne(
	{ fine, width, out, offset, n, rows }: Place,
	{ s, p, q, modes }: Pass,
	t: Float64Array
): void {
	const a = t[0],
		b = t[3],
		d = t[6];
	for (let j = 0, at = modes[0], to = offset + s; j < rows; j++, at += width, to += n) {
		const f = fine[at];
		const x = out[to] + a * f,
			y = out[to + p] + b * f,
			z = out[to + q] + d * f;
		out[to] = x;
		out[to + p] = y;
		out[to + q] = z;
	}
}

function writeThree(
	{ fine, width, out, offset, n, rows }: Place,
	{ s, p, q, modes }: Pass,
	t: Float64Array
): void {
	const c = t[9],
		c1 = t[10],
		c2 = t[11];
	const a = t[0],
		a1 = t[1],
		a2 = t[2];
	const b = t[3],
		b1 = t[4],
		b2 = t[5];
	const d = t[6],
		d1 = t[7],
		d2 = t[8];
	const l = modes[0],
		m = modes[1],
		o = modes[2];
	for (let j = 0, at = 0, to = offset + s; j < rows; j++, at += width, to += n) {
		const f = fine[at + l],
			g = fine[at + m],
			h = fine[at + o];
		out[to] = c + a * f + a1 * g + a2 * h;
		out[to + p] = c1 + b * f + b1 * g + b2 * h;
		out[to + q] = c2 + d * f + d1 * g + d2 * h;
	}
}

/** `writeThree` and the riders. */
function writeFive(
	{ fine, width, out, offset, n, rows }: Place,
	{ s, p, q, modes }: Pass,
	riders: Riders,
	t: Float64Array
): void {
	const c = t[9],
		c1 = t[10],
		c2 = t[11];
	const a = t[0],
		a1 = t[1],
		a2 = t[2];
	const b = t[3],
		b1 = t[4],
		b2 = t[5];
	const d = t[6],
		d1 = t[7],
		d2 = t[8];
	const l = modes[0],
		m = modes[1],
		o = modes[2];
	const { u, v } = riders;
	const e = t[12],
		c3 = t[13],
		i = t[14],
		c4 = t[15];
	for (let j = 0, at = 0, to = offset + s; j < rows; j++, at += width, to += n) {
		const f = fine[at + l],
			g = fine[at + m],
			h = fine[at + o];
		out[to + u] = c3 + e * f;
		out[to + v] = c4 + i * f;
		out[to] = c + a * f + a1 * g + a2 * h;
		out[to + p] = c1 + b * f + b1 * g + b2 * h;
		out[to + q] = c2 + d * f + d1 * g + d2 * h;
	}
}

function addThree(
	{ fine, width, out, offset, n, rows }: Place,
	{ s, p, q, modes }: Pass,
	t: Float64Array
): void {
	const a = t[0],
		a1 = t[1],
		a2 = t[2];
	const b = t[3],
		b1 = t[4],
		b2 = t[5];
	const d = t[6],
		d1 = t[7],
		d2 = t[8];
	const l = modes[0],
		m = modes[1],
		o = modes[2];
	for (let j = 0, at = 0, to = offset + s; j < rows; j++, at += width, to += n) {
		const f = fine[at + l],
			g = fine[at + m],
			h = fine[at + o];
		const x = out[to] + a * f + a1 * g + a2 * h,
			y = out[to + p] + b * f + b1 * g + b2 * h,
			z = out[to + q] + d * f + d1 * g + d2 * h;
		out[to] = x;
		out[to + p] = y;
		out[to + q] = z;
	}
}
