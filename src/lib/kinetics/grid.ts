/**
 * Real simple modes on an equally spaced grid of times: N times cost some √N exponentials a mode instead of N.
 *
 *     e^{λ(t₀ + (mB + j)Δ)} = e^{λ(t₀ + mBΔ)} · e^{λjΔ},   B ≈ 4√N
 *
 * The first factor is folded into the amplitudes once for B times; what remains a time is a short sum of products
 * (`term-sums.ts`). Both tables of factors are made in the same manner from √B exponentials. The rounding of a
 * product of exponentials is that of one.
 *
 * Whether a value is small beside its terms is first asked of a whole block: every factor falls with time, so that the
 * positive terms at the block's end and the negative ones at its start bound the values between from below.
 *
 * | symbol | name here |
 * | --- | --- |
 * | e^{λ_l jΔ} | `fine[j·width + l]` |
 * | e^{λ_l(t₀ + mBΔ)} | `far[m·width + l]`, of the block at hand `coarse[place + l]` |
 */
import type { ClosedForm } from './closed-form';
import { Scratch } from './scratch';
import { TermSums, type Factors } from './term-sums';

/** Fewer times than this are not worth the tables. */
const FEWEST = 48;
/** Times of a block, over √N. */
const BLOCK = 4;
/** Rows that are looked through one by one. */
const SHORT = 8;

/** Spacing of an equally spaced list of times ≥ 0 (to rounding), 0 when it is not one. */
export function gridStep(timesS: ArrayLike<number>): number {
	const count = timesS.length;
	if (count < FEWEST) return 0;
	const first = timesS[0];
	const step = (timesS[count - 1] - first) / (count - 1);
	if (!(first >= 0) || !(step > 0) || !Number.isFinite(step)) return 0;
	for (let k = 1; k < count; k++) {
		const expected = first + k * step;
		if (!(Math.abs(timesS[k] - expected) <= 4 * Number.EPSILON * expected)) return 0;
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
	const { n, width, re } = form;
	const { firstS, stepS, count } = grid;
	const size = Math.min(count, Math.ceil(BLOCK * Math.sqrt(count)));
	const sums = new TermSums(form);
	const blocks = Math.ceil(count / size);
	const fine = fineMemory.room(size * width);
	const far = farMemory.room(blocks * width);
	factors(re, { firstS: 0, stepS, count: size }, fine);
	factors(re, { firstS, stepS: size * stepS, count: blocks }, far);
	const unsure: number[] = [];
	for (let start = 0, m = 0; start < count; start += size, m++) {
		const rows = Math.min(size, count - start);
		sums.write({ fine, coarse: far, place: m * width }, out, start * n, rows);
		gatherUnsure(form, trust, { fine, coarse: far, place: m * width, start }, 0, rows, out, unsure);
	}
	return unsure;
}

/** e^{λ_l (t₀ + jΔ)} for j < count, times-major, into `table` (which may be longer). */
function factors(re: Float64Array, grid: Grid, table: Float64Array): void {
	const { firstS, stepS, count } = grid;
	const width = re.length;
	const near = Math.ceil(Math.sqrt(count));
	for (let l = 0; l < width; l++) {
		const rate = re[l];
		if (rate === 0) {
			for (let j = 0, at = l; j < count; j++, at += width) table[at] = 1;
			continue;
		}
		for (let q = 0, at = l; q < near; q++, at += width) table[at] = Math.exp(rate * (q * stepS));
		const end = width * count;
		for (let j = near; j < count; j += near) {
			const base = Math.exp(rate * (firstS + j * stepS));
			const stop = Math.min(end, (j + near) * width);
			for (let at = l, to = j * width + l; to < stop; at += width, to += width) table[to] = base * table[at];
		}
		if (firstS === 0) continue;
		const base = Math.exp(rate * firstS);
		for (let at = l; at < near * width; at += width) table[at] *= base;
	}
}

const fineMemory = new Scratch();
const farMemory = new Scratch();

interface Block extends Factors {
	/** Grid index of its first row. */
	start: number;
}

/** Rows from … to − 1 of a block, halved until a part is above doubt or short enough to be looked through. */
function gatherUnsure(
	form: ClosedForm,
	trust: GridTrust,
	block: Block,
	from: number,
	to: number,
	out: Float64Array,
	unsure: number[]
): void {
	if (allTrusted(form, trust, block, from, to - 1)) return;
	if (to - from > SHORT) {
		const middle = (from + to) >> 1;
		gatherUnsure(form, trust, block, from, middle, out, unsure);
		gatherUnsure(form, trust, block, middle, to, out, unsure);
		return;
	}
	for (let j = from; j < to; j++) if (!rowTrusted(form, trust, block, j, out)) unsure.push(block.start + j);
}

/** Whether no species can fall below what is trusted between two rows. */
function allTrusted(
	{ n, width, amplitudes }: ClosedForm,
	{ trusted }: GridTrust,
	{ fine, coarse, place }: Block,
	first: number,
	last: number
): boolean {
	const early = first * width;
	const late = last * width;
	for (let s = 0, at = 0; s < n; s++) {
		let lowest = 0;
		for (let l = 0; l < width; l++, at++) {
			if (amplitudes[at] === 0) continue;
			const term = amplitudes[at] * coarse[place + l];
			lowest += term * fine[(term > 0 ? late : early) + l];
		}
		if (!(lowest >= trusted[s])) return false;
	}
	return true;
}

function rowTrusted(form: ClosedForm, trust: GridTrust, block: Block, j: number, out: Float64Array): boolean {
	const { n } = form;
	for (let s = 0, at = (block.start + j) * n; s < n; s++, at++) {
		const value = Math.abs(out[at]);
		if (value >= trust.trusted[s]) continue;
		if (!trust.exactAmplitudes || !decayed(form, trust, block, j, s, value)) return false;
	}
	return true;
}

/** A small value is fine where its terms have decayed as much. */
function decayed(
	form: ClosedForm,
	{ smallest }: GridTrust,
	{ fine, coarse, place }: Block,
	j: number,
	s: number,
	value: number
): boolean {
	const { width, sizes } = form;
	let size = 0;
	for (let l = 0, at = s * width; l < width; l++, at++)
		size += sizes[at] * coarse[place + l] * fine[j * width + l];
	return value >= smallest * size;
}
