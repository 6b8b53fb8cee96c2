/**
 * Evaluation of e^{Kt} c₀ without any subtraction: the yardstick for every other way of solving, and the last resort.
 *
 * Problem: closed forms lose digits where modes nearly cancel (early times, nearly equal rates, ill-conditioned bases), and
 * ordinary scaling and squaring loses about ε‖K‖t on stiff schemes. Here every number is non-negative and every operation a
 * sum or product, so small concentrations keep their *relative* accuracy; and the diagonal of each power is rebuilt from what
 * leaves the species, so that no rounding is ever multiplied by ‖K‖t.
 *
 *     e^{Kh} = e^{−qh} Σ_m ((K + qI) h)^m / m!            (uniformisation, h = h₀ a power of two with q h₀ ≤ 1)
 *     P_m = e^{K h₀ 2^m}                                  (squares, diagonals rebuilt: `propagator-powers.ts`)
 *     c(t) = Π P_m^{bit m of t/h₀} e^{Kr} c₀,   0 ≤ r < h₀
 *
 * Rounding then acts as a relative change of a few ε in each rate
 * constant per squaring, to which e^{Kt} is insensitive. About 60 squarings cover rate ratios of 1e12 and times from 1e-3 of
 * the fastest to 1e3 of the slowest time constant; they are made once, when first needed.
 *
 * | symbol | name here |
 * | --- | --- |
 * | q | `shift`, the largest outflow, 1/s |
 * | h₀ | `baseStepS` |
 * | P_m | `powers.level(m).p`, row-major |
 *
 * Sources: A. Jensen, Skand. Aktuarietidskr. 36 (1953) 87 (uniformisation); J. Xue and Q. Ye, Entrywise relative perturbation
 * bounds for exponentials of essentially non-negative matrices, Numer. Math. 110 (2008) 393, and Math. Comp. 82 (2013) 1577;
 * W. K. Grassmann, M. I. Taksar and D. P. Heyman, Oper. Res. 33 (1985) 1107 (diagonals from what leaves, without subtraction).
 */
import { blockWeights, type BlockWeights } from './block-weights';
import { components, type Components } from './components';
import { PropagatorPowers, type FlowTable } from './propagator-powers';
import type { LinearSystem } from './types';

/** q·t up to which the series alone is used, so that early times need no powers. */
const SHORT = 8;

/** Products in a row on a grid of times. */
const RESTART = 16;

export class Propagator implements FlowTable {
	readonly n: number;
	readonly shift: number;
	readonly baseStepS: number;
	readonly parts: Components;
	readonly from: Int32Array;
	readonly to: Int32Array;
	readonly rate: Float64Array;
	readonly stay: Float64Array;
	readonly outflow: Float64Array;
	private readonly powers: PropagatorPowers;
	private readonly term: Float64Array;
	private readonly nextTerm: Float64Array;

	/** @throws RangeError when products multiply round a loop without limit. */
	constructor(system: LinearSystem, parts: Components = components(system), balance?: BlockWeights) {
		this.n = system.n;
		this.parts = parts;
		this.powers = new PropagatorPowers(this, balance ?? blockWeights(system, parts));
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
		if (this.powers.count === 0 && timeS * this.shift <= SHORT) {
			if (timeS > 0) this.uniformise(timeS, out);
			return out;
		}
		let level = Math.floor(Math.log2(timeS / this.baseStepS));
		for (; level >= 0; level--) {
			const step = this.baseStepS * Math.pow(2, level);
			if (left < step) continue;
			left -= step;
			this.multiply(this.powers.level(level).p, out);
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
		return this.powers.level(level).p;
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
}
