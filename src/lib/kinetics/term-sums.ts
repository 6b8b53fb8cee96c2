/**
 * Sums of a closed form's terms over many times: the innermost loop of every drawn curve.
 *
 *     c_s(t_j) = a_s0 + Σ_l a_sl E_l F_jl
 *
 * This is a product of a (times × modes) with a (modes × species) matrix, most of whose entries may be zero. It is taken in
 * passes of three species by up to three modes (`term-passes.ts`), each a loop over the times.
 *
 * | symbol | name here |
 * | --- | --- |
 * | a_s0 (sum over modes of rate zero), a_sl | `Pass.terms` |
 * | E_l, F_jl | `coarse[place + l]`, `fine[j·width + l]` |
 */
import type { ClosedForm } from './closed-form';
import { CONSTANTS, passesOf, RIDERS, TERMS, type Pass, type Riders } from './term-passes';

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
