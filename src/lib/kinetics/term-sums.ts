/**
 * Sums of a closed form's terms over many times: the innermost loop of every drawn curve.
 *
 *     c_s(t_j) = a_s0 + Σ_l a_sl E_l F_jl
 *
 * This is a product of a (times × modes) with a (modes × species) matrix, most of whose entries may be zero. It is taken in
 * passes of three species by up to three modes: twelve numbers stay in registers, and each factor F_jl is read once for
 * three species. Species with few terms go together, so that few zeros are multiplied.
 *
 * | symbol | name here |
 * | --- | --- |
 * | a_s0 (sum over modes of rate zero), a_sl | `Pass.terms` |
 * | E_l, F_jl | `coarse[l]`, `fine[j·width + l]` |
 */
import type { ClosedForm } from './closed-form';

interface Pass {
	/** The first of three species and how far the others stand from it; 0 or the same again where there are fewer. */
	s: number;
	p: number;
	q: number;
	/** Three modes; the first again, with amplitudes of zero, where there are fewer. */
	modes: Int32Array;
	/** Whether only the first mode counts. */
	single: boolean;
	/** Whether the sums are added to those of an earlier pass. */
	adds: boolean;
	/** Three amplitudes a species, by mode; then the constants of the three. */
	terms: Float64Array;
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

/** The terms of one closed form, arranged for summing. */
export class TermSums {
	private readonly passes: Pass[];
	private readonly scaled = new Float64Array(12);

	constructor(private readonly form: ClosedForm) {
		this.passes = passesOf(form);
	}

	/**
	 * Writes rows × n values from out[offset] on.
	 * @param fine factors F by row and mode
	 * @param coarse a further factor E of each mode, the same for all rows
	 */
	write(fine: Float64Array, coarse: Float64Array, out: Float64Array, offset: number, rows: number): void {
		const { n, width } = this.form;
		const place = { fine, width, out, offset, n, rows };
		const terms = this.scaled;
		for (const pass of this.passes) {
			scale(pass, coarse, terms);
			if (pass.single) (pass.adds ? addOne : writeOne)(place, pass, terms);
			else (pass.adds ? addThree : writeThree)(place, pass, terms);
		}
	}
}

function scale({ modes, terms }: Pass, coarse: Float64Array, scaled: Float64Array): void {
	for (let k = 0; k < 3; k++) {
		const factor = coarse[modes[k]];
		for (let i = k; i < 9; i += 3) scaled[i] = terms[i] * factor;
		scaled[9 + k] = terms[9 + k];
	}
}

function passesOf(form: ClosedForm): Pass[] {
	const { n } = form;
	const passes: Pass[] = [];
	const order = byNumberOfTerms(form);
	for (let from = 0, to = n % 3 || 3; from < n; from = to, to += 3) {
		const species = [order[from], order[Math.min(from + 1, to - 1)], order[to - 1]];
		const modes = modesOf(form, species);
		passes.push(firstPass(form, species, modes));
		for (let k = 3; k < modes.length; k += 3) passes.push(passOf(form, species, modes.slice(k, k + 3), true));
	}
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

/** The pass that also writes the constants. */
function firstPass(form: ClosedForm, species: number[], modes: number[]): Pass {
	const { width, amplitudes, re } = form;
	const pass = passOf(form, species, modes.slice(0, 3), false);
	for (let l = 0; l < width; l++)
		if (re[l] === 0) for (let i = 0; i < 3; i++) pass.terms[9 + i] += amplitudes[species[i] * width + l];
	return pass;
}

function passOf({ width, amplitudes }: ClosedForm, species: number[], modes: number[], adds: boolean): Pass {
	const [s, s1, s2] = species;
	const terms = new Float64Array(12);
	const filled = new Int32Array(3).fill(modes[0] ?? 0);
	for (let k = 0; k < modes.length; k++) {
		filled[k] = modes[k];
		for (let i = 0; i < 3; i++) terms[3 * i + k] = amplitudes[species[i] * width + modes[k]];
	}
	return { s, p: s1 - s, q: s2 - s, modes: filled, single: modes.length < 2, adds, terms };
}

function writeOne({ fine, width, out, offset, n, rows }: Place, pass: Pass, t: Float64Array): void {
	const { s, p, q } = pass;
	const c = t[9],
		c1 = t[10],
		c2 = t[11];
	const a = t[0],
		b = t[3],
		d = t[6];
	for (let j = 0, at = pass.modes[0], to = offset + s; j < rows; j++, at += width, to += n) {
		const f = fine[at];
		out[to] = c + a * f;
		out[to + p] = c1 + b * f;
		out[to + q] = c2 + d * f;
	}
}

function addOne({ fine, width, out, offset, n, rows }: Place, pass: Pass, t: Float64Array): void {
	const { s, p, q } = pass;
	const a = t[0],
		b = t[3],
		d = t[6];
	for (let j = 0, at = pass.modes[0], to = offset + s; j < rows; j++, at += width, to += n) {
		const f = fine[at];
		const x = out[to] + a * f;
		const y = out[to + p] + b * f;
		const z = out[to + q] + d * f;
		out[to] = x;
		out[to + p] = y;
		out[to + q] = z;
	}
}

function writeThree({ fine, width, out, offset, n, rows }: Place, pass: Pass, t: Float64Array): void {
	const { s, p, q } = pass;
	const l = pass.modes[0],
		m = pass.modes[1],
		o = pass.modes[2];
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
	for (let j = 0, at = 0, to = offset + s; j < rows; j++, at += width, to += n) {
		const f = fine[at + l];
		const g = fine[at + m];
		const h = fine[at + o];
		out[to] = c + a * f + a1 * g + a2 * h;
		out[to + p] = c1 + b * f + b1 * g + b2 * h;
		out[to + q] = c2 + d * f + d1 * g + d2 * h;
	}
}

function addThree({ fine, width, out, offset, n, rows }: Place, pass: Pass, t: Float64Array): void {
	const { s, p, q } = pass;
	const l = pass.modes[0],
		m = pass.modes[1],
		o = pass.modes[2];
	const a = t[0],
		a1 = t[1],
		a2 = t[2];
	const b = t[3],
		b1 = t[4],
		b2 = t[5];
	const d = t[6],
		d1 = t[7],
		d2 = t[8];
	for (let j = 0, at = 0, to = offset + s; j < rows; j++, at += width, to += n) {
		const f = fine[at + l];
		const g = fine[at + m];
		const h = fine[at + o];
		const x = out[to] + a * f + a1 * g + a2 * h;
		const y = out[to + p] + b * f + b1 * g + b2 * h;
		const z = out[to + q] + d * f + d1 * g + d2 * h;
		out[to] = x;
		out[to + p] = y;
		out[to + q] = z;
	}
}
