/**
 * Real simple modes on an equally spaced grid of times: N times cost some 3√N exponentials a mode instead of N.
 *
 *     e^{λ(t₀ + (mB + j)Δ)} = e^{λ(t₀ + mBΔ)} · e^{λjΔ},   B ≈ 2√N (longer rows cost less than more calls)
 *
 * The first factor is folded into the amplitudes once for B times; what remains a time is a short sum of products, taken
 * species by species over the modes that the species has. The rounding of a product of two exponentials is that of one.
 *
 * | symbol | name here |
 * | --- | --- |
 * | e^{λ_l jΔ} | `fine[l][j]` |
 * | e^{λ_l(t₀ + mBΔ)} | `coarse[l]` |
 */
import type { ClosedForm } from './closed-form';

/** Fewer times than this are not worth the tables. */
const FEWEST = 48;

/** Spacing of an equally spaced list of times ≥ 0 (to rounding), 0 when it is not one. */
export function gridStep(timesS: ArrayLike<number>): number {
	const count = timesS.length;
	if (count < FEWEST) return 0;
	const first = timesS[0];
	const step = (timesS[count - 1] - first) / (count - 1);
	if (!(first >= 0) || !(step > 0) || !Number.isFinite(step)) return 0;
	for (let k = 1; k < count; k++) {
		const expected = first + k * step;
		if (Math.abs(timesS[k] - expected) > 4 * Number.EPSILON * expected) return 0;
	}
	return step;
}

export interface Grid {
	firstS: number;
	stepS: number;
	count: number;
}

/** What the closed form can be trusted for; see `Judgement`. */
export interface GridTrust {
	trusted: Float64Array;
	smallest: number;
	exactAmplitudes: boolean;
}

/**
 * Writes count × n values of a simple closed form, times-major.
 * @returns the grid indices at which some value is small beside its terms and has to be evaluated otherwise
 */
export function curvesOnGrid(form: ClosedForm, grid: Grid, trust: GridTrust, out: Float64Array): number[] {
	const { n, width, amplitudes, re } = form;
	const { firstS, stepS, count } = grid;
	const block = Math.ceil(2 * Math.sqrt(count));
	const fine = fineTables(re, stepS, block);
	const coarse = new Float64Array(width);
	const modes = new Int32Array(width);
	const scaled = new Float64Array(width);
	const unsure: number[] = [];
	for (let start = 0; start < count; start += block) {
		const rows = Math.min(block, count - start);
		for (let l = 0; l < width; l++) coarse[l] = Math.exp(re[l] * (firstS + start * stepS));
		let sure = true;
		for (let s = 0; s < n; s++) {
			let constant = 0;
			let terms = 0;
			for (let l = 0; l < width; l++) {
				const amplitude = amplitudes[s * width + l];
				if (amplitude === 0) continue;
				if (re[l] === 0) constant += amplitude;
				else {
					modes[terms] = l;
					scaled[terms++] = amplitude * coarse[l];
				}
			}
			const lowest = sumTerms(fine, modes, scaled, terms, constant, out, start * n + s, n, rows);
			if (!(lowest >= trust.trusted[s])) sure = false;
		}
		if (!sure) gatherUnsure(form, trust, { fine, coarse, start, rows }, out, unsure);
	}
	return unsure;
}

/** e^{λ_l jΔ} for j < block, one array a mode. */
function fineTables(re: Float64Array, stepS: number, block: number): Float64Array[] {
	const tables: Float64Array[] = [];
	for (let l = 0; l < re.length; l++) {
		const table = new Float64Array(block);
		for (let j = 0; j < block; j++) table[j] = re[l] === 0 ? 1 : Math.exp(re[l] * (j * stepS));
		tables.push(table);
	}
	return tables;
}

/**
 * out[offset + j·stride] = constant + Σ scaled[i] fine[modes[i]][j], three terms at a time so that the amplitudes stay in
 * registers. Returns the smallest value written.
 */
function sumTerms(
	fine: Float64Array[],
	modes: Int32Array,
	scaled: Float64Array,
	terms: number,
	constant: number,
	out: Float64Array,
	offset: number,
	stride: number,
	rows: number
): number {
	const end = offset + rows * stride;
	if (terms === 0) {
		for (let to = offset; to < end; to += stride) out[to] = constant;
		return constant;
	}
	let lowest =
		terms === 1
			? one(fine[modes[0]], scaled[0], constant, out, offset, stride, end)
			: terms === 2
				? two(fine[modes[0]], fine[modes[1]], scaled[0], scaled[1], constant, out, offset, stride, end)
				: three(fine[modes[0]], fine[modes[1]], fine[modes[2]], scaled, constant, out, offset, stride, end);
	for (let i = 3; i < terms; i++) lowest = more(fine[modes[i]], scaled[i], out, offset, stride, end);
	return lowest;
}

function one(
	f: Float64Array,
	a: number,
	c: number,
	out: Float64Array,
	offset: number,
	stride: number,
	end: number
) {
	let lowest = Infinity;
	for (let j = 0, to = offset; to < end; j++, to += stride) {
		const value = c + a * f[j];
		out[to] = value;
		if (value < lowest) lowest = value;
	}
	return lowest;
}

function two(
	f: Float64Array,
	g: Float64Array,
	a: number,
	b: number,
	c: number,
	out: Float64Array,
	offset: number,
	stride: number,
	end: number
): number {
	let lowest = Infinity;
	for (let j = 0, to = offset; to < end; j++, to += stride) {
		const value = c + a * f[j] + b * g[j];
		out[to] = value;
		if (value < lowest) lowest = value;
	}
	return lowest;
}

function three(
	f: Float64Array,
	g: Float64Array,
	h: Float64Array,
	scaled: Float64Array,
	c: number,
	out: Float64Array,
	offset: number,
	stride: number,
	end: number
): number {
	const [a, b, d] = [scaled[0], scaled[1], scaled[2]];
	let lowest = Infinity;
	for (let j = 0, to = offset; to < end; j++, to += stride) {
		const value = c + a * f[j] + b * g[j] + d * h[j];
		out[to] = value;
		if (value < lowest) lowest = value;
	}
	return lowest;
}

/** Adds one more term to what stands. */
function more(
	f: Float64Array,
	a: number,
	out: Float64Array,
	offset: number,
	stride: number,
	end: number
): number {
	let lowest = Infinity;
	for (let j = 0, to = offset; to < end; j++, to += stride) {
		const value = out[to] + a * f[j];
		out[to] = value;
		if (value < lowest) lowest = value;
	}
	return lowest;
}

interface Block {
	fine: Float64Array[];
	coarse: Float64Array;
	start: number;
	rows: number;
}

function gatherUnsure(
	form: ClosedForm,
	trust: GridTrust,
	b: Block,
	out: Float64Array,
	unsure: number[]
): void {
	const { n } = form;
	const { trusted } = trust;
	for (let j = 0, at = b.start * n; j < b.rows; j++) {
		let sure = true;
		for (let s = 0; s < n; s++, at++)
			if (
				!(Math.abs(out[at]) >= trusted[s]) &&
				!(trust.exactAmplitudes && decayed(form, trust, b, j, s, out[at]))
			)
				sure = false;
		if (!sure) unsure.push(b.start + j);
	}
}

/** A small value is fine where its terms have decayed as much. */
function decayed(form: ClosedForm, trust: GridTrust, b: Block, j: number, s: number, value: number): boolean {
	let size = 0;
	for (let l = 0, at = s * form.width; l < form.width; l++, at++)
		size += form.sizes[at] * b.coarse[l] * b.fine[l][j];
	return Math.abs(value) >= trust.smallest * size;
}
