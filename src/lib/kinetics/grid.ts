/**
 * Real simple modes on an equally spaced grid of times: N times cost 2√N exponentials a mode instead of N.
 *
 *     e^{λ(t₀ + (mB + j)Δ)} = e^{λ(t₀ + mBΔ)} · e^{λjΔ},   B ≈ √N
 *
 * The first factor is folded into the amplitudes once for B times; what remains a time is a short sum of products, taken
 * species by species over the modes that the species has. The rounding of a product of two exponentials is that of one.
 *
 * | symbol | name here |
 * | --- | --- |
 * | e^{λ_l jΔ} | `fine[l·block + j]` |
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
	const block = Math.ceil(Math.sqrt(count));
	const fine = new Float64Array(block * width);
	for (let l = 0; l < width; l++)
		for (let j = 0; j < block; j++) fine[l * block + j] = re[l] === 0 ? 1 : Math.exp(re[l] * (j * stepS));
	const coarse = new Float64Array(width);
	const modes = new Int32Array(Math.max(width, 4));
	const scaled = new Float64Array(Math.max(width, 4));
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
					modes[terms] = l * block;
					scaled[terms++] = amplitude * coarse[l];
				}
			}
			const column = { out, offset: start * n + s, stride: n, rows, constant };
			const lowest = sumTerms(fine, modes, scaled, terms, column);
			if (!(lowest >= trust.trusted[s])) sure = false;
		}
		if (!sure) gatherUnsure(form, trust, { fine, coarse, block, start, rows }, out, unsure);
	}
	return unsure;
}

interface Column {
	out: Float64Array;
	offset: number;
	stride: number;
	rows: number;
	constant: number;
}

/**
 * out[offset + j·stride] = constant + Σ scaled[i] fine[modes[i] + j], up to three terms at once so that the amplitudes stay in
 * registers. Returns the smallest value written.
 */
function sumTerms(
	fine: Float64Array,
	modes: Int32Array,
	scaled: Float64Array,
	terms: number,
	column: Column
): number {
	const { out, offset, stride, rows, constant } = column;
	const first = Math.min(terms, 3);
	const a0 = first > 0 ? scaled[0] : 0;
	const a1 = first > 1 ? scaled[1] : 0;
	const a2 = first > 2 ? scaled[2] : 0;
	const m0 = first > 0 ? modes[0] : 0;
	const m1 = first > 1 ? modes[1] : 0;
	const m2 = first > 2 ? modes[2] : 0;
	let lowest = Infinity;
	if (first === 3)
		for (let j = 0, to = offset; j < rows; j++, to += stride) {
			const value = constant + a0 * fine[m0 + j] + a1 * fine[m1 + j] + a2 * fine[m2 + j];
			out[to] = value;
			if (value < lowest) lowest = value;
		}
	else if (first === 2)
		for (let j = 0, to = offset; j < rows; j++, to += stride) {
			const value = constant + a0 * fine[m0 + j] + a1 * fine[m1 + j];
			out[to] = value;
			if (value < lowest) lowest = value;
		}
	else
		for (let j = 0, to = offset; j < rows; j++, to += stride) {
			const value = constant + a0 * fine[m0 + j];
			out[to] = value;
			if (value < lowest) lowest = value;
		}
	for (let i = 3; i < terms; i += 2)
		lowest = addTerms(fine, modes, scaled, i, Math.min(2, terms - i), column);
	return lowest;
}

/** Adds one or two more terms. */
function addTerms(
	fine: Float64Array,
	modes: Int32Array,
	scaled: Float64Array,
	first: number,
	count: number,
	{ out, offset, stride, rows }: Column
): number {
	const a0 = scaled[first];
	const m0 = modes[first];
	const a1 = count > 1 ? scaled[first + 1] : 0;
	const m1 = count > 1 ? modes[first + 1] : m0;
	let lowest = Infinity;
	for (let j = 0, to = offset; j < rows; j++, to += stride) {
		const value = out[to] + a0 * fine[m0 + j] + a1 * fine[m1 + j];
		out[to] = value;
		if (value < lowest) lowest = value;
	}
	return lowest;
}

interface Block {
	fine: Float64Array;
	coarse: Float64Array;
	block: number;
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
		size += form.sizes[at] * b.coarse[l] * b.fine[l * b.block + j];
	return Math.abs(value) >= trust.smallest * size;
}
