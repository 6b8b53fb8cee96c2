/**
 * Evaluation of e^{Kt} c₀ without any subtraction: the yardstick for every other way of solving, and the last resort.
 *
 * Problem: closed forms lose digits where modes nearly cancel (early times, nearly equal rates, ill-conditioned bases), and
 * ordinary scaling and squaring loses about ε‖K‖t on stiff schemes. Here every number is non-negative and every operation a
 * sum or product, so small concentrations keep their *relative* accuracy; and the diagonal of each power is rebuilt from what
 * leaves the species, so that no rounding is ever multiplied by ‖K‖t.
 *
 *     e^{Kh} = e^{−qh} Σ_m ((K + qI) h)^m / m!            (uniformisation, h = h₀ a power of two with q h₀ ≤ 1)
 *     P_{m+1} = P_m²,   x_{m+1} = x_m + x_m P_m          (x: what has left the component by then)
 *     P_jj  = 1 − x_j − Σ_{i≠j} P_ij                     when that sum is ≤ ½, else the column is divided by its total
 *     c(t) = Π P_m^{bit m of t/h₀} e^{Kr} c₀,   0 ≤ r < h₀
 *
 * A single-species component has P_jj = e^{−k h} itself. Rounding then acts as a relative change of a few ε in each rate
 * constant per squaring, to which e^{Kt} is insensitive. About 60 squarings cover rate ratios of 1e12 and times from 1e-3 of
 * the fastest to 1e3 of the slowest time constant; they are made once, when first needed.
 *
 * | symbol | name here |
 * | --- | --- |
 * | q | `shift`, the largest outflow, 1/s |
 * | h₀ | `baseStepS` |
 * | P_m, x_m | `levels[m].p` (row-major), `levels[m].x` |
 *
 * Sources: A. Jensen, Skand. Aktuarietidskr. 36 (1953) 87 (uniformisation); J. Xue and Q. Ye, Entrywise relative perturbation
 * bounds for exponentials of essentially non-negative matrices, Numer. Math. 110 (2008) 393, and Math. Comp. 82 (2013) 1577;
 * W. K. Grassmann, M. I. Taksar and D. P. Heyman, Oper. Res. 33 (1985) 1107 (diagonals from what leaves, without subtraction).
 */
import { blockWeights, type BlockWeights } from './block-weights';
import { components, type Components } from './components';
import type { LinearSystem } from './types';

interface Level {
	p: Float64Array;
	x: Float64Array;
}

/** q·t up to which the series alone is used, so that early times need no powers. */
const SHORT = 8;

/** Products in a row on a grid of times. */
const RESTART = 16;

export class Propagator {
	readonly n: number;
	readonly shift: number;
	readonly baseStepS: number;
	readonly parts: Components;
	private readonly levels: Level[] = [];
	private readonly weights: Float64Array;
	private readonly exits: Float64Array;
	private readonly from: Int32Array;
	private readonly to: Int32Array;
	private readonly rate: Float64Array;
	private readonly stay: Float64Array;
	private readonly outflow: Float64Array;
	private readonly term: Float64Array;
	private readonly nextTerm: Float64Array;

	/** @throws RangeError when products multiply round a loop without limit. */
	constructor(system: LinearSystem, parts: Components = components(system), balance?: BlockWeights) {
		this.n = system.n;
		this.parts = parts;
		const { weights, exits } = balance ?? blockWeights(system, parts);
		this.weights = weights;
		this.exits = exits;
		this.outflow = system.outflow;
		const { transfers } = system;
		this.from = new Int32Array(transfers.length);
		this.to = new Int32Array(transfers.length);
		this.rate = new Float64Array(transfers.length);
		for (let e = 0; e < transfers.length; e++) {
			this.from[e] = transfers[e].from;
			this.to[e] = transfers[e].to;
			this.rate[e] = transfers[e].rate * transfers[e].coefficient;
		}
		let shift = 0;
		for (const k of system.outflow) shift = Math.max(shift, k);
		this.shift = shift > 0 ? shift : 1;
		this.baseStepS = Math.pow(2, Math.floor(-Math.log2(this.shift)));
		this.stay = new Float64Array(this.n);
		for (let i = 0; i < this.n; i++) this.stay[i] = this.shift - system.outflow[i];
		this.term = new Float64Array(this.n);
		this.nextTerm = new Float64Array(this.n);
	}

	/**
	 * c(t) = e^{Kt} c₀ for a finite t ≥ 0, written into `out` (length n, may be `charge` itself).
	 * Non-negative in, non-negative out, each with a relative error of some 1e-14.
	 */
	apply(
		timeS: number,
		charge: ArrayLike<number>,
		out: Float64Array = new Float64Array(this.n)
	): Float64Array {
		for (let i = 0; i < this.n; i++) out[i] = charge[i];
		let left = timeS;
		if (this.levels.length === 0 && timeS * this.shift <= SHORT) {
			if (timeS > 0) this.uniformise(timeS, out);
			return out;
		}
		let level = Math.floor(Math.log2(timeS / this.baseStepS));
		for (; level >= 0; level--) {
			const step = this.baseStepS * Math.pow(2, level);
			if (left < step) continue;
			left -= step;
			this.multiply(this.level(level).p, out);
		}
		if (left > 0) this.uniformise(left, out);
		return out;
	}

	/**
	 * c at firstS + k·stepS for k = 0 … count − 1, times-major into `out`: one product with e^{K·stepS} a time, begun afresh
	 * from the charge every RESTART times so that rounding does not add up.
	 */
	applyGrid(
		{ firstS, stepS, count }: { firstS: number; stepS: number; count: number },
		charge: ArrayLike<number>,
		out: Float64Array
	): Float64Array {
		const { n } = this;
		const step = this.matrix(stepS);
		const c = new Float64Array(n);
		for (let k = 0; k < count; k++) {
			if (k % RESTART === 0) this.apply(firstS + k * stepS, charge, c);
			else this.multiply(step, c);
			out.set(c, k * n);
		}
		return out;
	}

	/** e^{Kt}, row-major n × n. */
	matrix(timeS: number): Float64Array {
		const { n } = this;
		const result = new Float64Array(n * n);
		const column = new Float64Array(n);
		for (let j = 0; j < n; j++) {
			column.fill(0);
			column[j] = 1;
			this.apply(timeS, column, column);
			for (let i = 0; i < n; i++) result[i * n + j] = column[i];
		}
		return result;
	}

	/** e^{Kh} for h = baseStepS · 2^level, row-major n × n; the engine's own memory, not to be written to. */
	power(level: number): Float64Array {
		return this.level(level).p;
	}

	private multiply(p: Float64Array, vector: Float64Array): void {
		const { n, nextTerm } = this;
		for (let i = 0; i < n; i++) {
			let sum = 0;
			for (let j = 0, at = i * n; j < n; j++, at++) sum += p[at] * vector[j];
			nextTerm[i] = sum;
		}
		vector.set(nextTerm);
	}

	/** e^{Kr} on a vector by the non-negative series; q r ≤ SHORT. */
	private uniformise(stepS: number, vector: Float64Array): void {
		const { n, from, to, rate, stay, term, nextTerm } = this;
		term.set(vector);
		for (let m = 1; m < 400; m++) {
			const h = stepS / m;
			for (let i = 0; i < n; i++) nextTerm[i] = stay[i] * h * term[i];
			for (let e = 0; e < rate.length; e++) nextTerm[to[e]] += rate[e] * h * term[from[e]];
			let growing = m < n;
			for (let i = 0; i < n; i++) {
				term[i] = nextTerm[i];
				if (Math.abs(term[i]) > 1e-18 * Math.abs(vector[i])) growing = true;
				vector[i] += term[i];
			}
			if (!growing) break;
		}
		const damping = Math.exp(-this.shift * stepS);
		for (let i = 0; i < n; i++) vector[i] *= damping;
	}

	private level(index: number): Level {
		if (this.levels.length === 0) this.levels.push(this.firstLevel());
		while (this.levels.length <= index)
			this.levels.push(this.squared(this.levels[this.levels.length - 1], this.levels.length));
		return this.levels[index];
	}

	private firstLevel(): Level {
		const { n, shift, baseStepS } = this;
		const p = new Float64Array(n * n);
		const x = new Float64Array(n);
		let term = new Float64Array(n * n);
		let next = new Float64Array(n * n);
		const xTerm = new Float64Array(n);
		for (let i = 0; i < n; i++) p[i * n + i] = term[i * n + i] = 1;
		for (let m = 1; m < n + 24; m++) {
			this.seriesTerm(baseStepS / m, term, next, xTerm);
			[term, next] = [next, term];
			for (let k = 0; k < n * n; k++) p[k] += term[k];
			for (let j = 0; j < n; j++) x[j] += xTerm[j];
		}
		const damping = Math.exp(-shift * baseStepS);
		for (let k = 0; k < n * n; k++) p[k] *= damping;
		for (let j = 0; j < n; j++) x[j] *= damping;
		this.renormalise(p, x, 0);
		return { p, x };
	}

	/** next = (K + qI) h · term, and the same for the row of what has left each component. */
	private seriesTerm(h: number, term: Float64Array, next: Float64Array, xTerm: Float64Array): void {
		const { n, from, to, rate, stay, exits, weights, parts } = this;
		for (let j = 0; j < n; j++) {
			let sum = this.shift * xTerm[j];
			for (const i of parts.blocks[parts.blockOf[j]])
				sum += (exits[i] * weights[i] * term[i * n + j]) / weights[j];
			xTerm[j] = sum * h;
		}
		for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) next[i * n + j] = stay[i] * h * term[i * n + j];
		for (let e = 0; e < rate.length; e++) {
			const source = from[e] * n;
			const target = to[e] * n;
			const factor = rate[e] * h;
			for (let j = 0; j < n; j++) next[target + j] += factor * term[source + j];
		}
	}

	private squared({ p, x }: Level, index: number): Level {
		const { n, parts, weights } = this;
		const q = new Float64Array(n * n);
		for (let i = 0; i < n; i++)
			for (let k = 0; k < n; k++) {
				const factor = p[i * n + k];
				if (factor === 0) continue;
				for (let j = 0, at = i * n, other = k * n; j < n; j++, at++, other++) q[at] += factor * p[other];
			}
		const y = new Float64Array(n);
		for (let j = 0; j < n; j++) {
			let sum = x[j];
			for (const i of parts.blocks[parts.blockOf[j]]) sum += (x[i] * weights[i] * p[i * n + j]) / weights[j];
			y[j] = sum;
		}
		this.renormalise(q, y, index);
		return { p: q, x: y };
	}

	private renormalise(p: Float64Array, x: Float64Array, index: number): void {
		const { n, parts, weights, outflow } = this;
		const stepS = this.baseStepS * Math.pow(2, index);
		for (const block of parts.blocks) {
			if (block.length === 1) {
				const j = block[0];
				p[j * n + j] = Math.exp(-outflow[j] * stepS);
				x[j] = -Math.expm1(-outflow[j] * stepS);
				continue;
			}
			for (const j of block) {
				let others = x[j];
				for (const i of block) if (i !== j) others += (p[i * n + j] * weights[i]) / weights[j];
				if (others <= 0.5) p[j * n + j] = 1 - others;
				else {
					const total = others + p[j * n + j];
					x[j] /= total;
					for (const i of block) p[i * n + j] /= total;
				}
			}
		}
	}
}
