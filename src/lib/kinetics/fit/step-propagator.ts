/**
 * Curves and derivatives from time to time by the exponential of the rate matrix itself, where its eigenbasis is of no use:
 * repeated rates, and loops out of detailed balance (complex modes).
 *
 *     c ← E c,   s_d ← E s_d + L_d c,   E = e^{Kh},  L_d = ∂E/∂ ln k_d
 *
 * Short intervals (q h up to 200, q the largest outflow) are taken on vectors (`step-series.ts`), long ones by squaring matrices
 * (`../step-exponential.ts`).
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | c, s_d, then ∂c/∂c₀ | rows of `state` |
 *
 * Sources: Jensen, Skand. Aktuarietidskr. 36 (1953) 87 (uniformisation); Xue & Ye, Numer. Math. 124 (2013) 393 (non-negative
 * scaling and squaring).
 */
import { StepExponential } from '../step-exponential';
import type { Watch } from './cancelled';
import type { Direction } from './spectral';
import { StepSeries } from './step-series';

/** Largest q h of an interval that is taken on vectors. */
const VECTORS_UP_TO = 200;
/** Difference of two intervals, relative to the time, that is rounding of the times themselves. */
const SAME_STEP = 4e-16;

export class StepPropagator {
	private readonly c: Float64Array;
	private readonly next: Float64Array;
	/** Concentrations, then ∂c/∂ln k of each rate, then ∂c/∂c₀ of each charge. */
	private readonly state: Float64Array;
	private readonly onVectors: StepSeries;
	/** The interval that the exponential at hand was made for. */
	private made = NaN;
	private readonly exponential: StepExponential;

	constructor(
		private readonly n: number,
		private readonly directions: Direction[],
		private readonly rates: number[],
		private readonly charges: number[]
	) {
		this.c = new Float64Array(n);
		this.next = new Float64Array(n);
		this.state = new Float64Array((1 + rates.length + charges.length) * n);
		this.onVectors = new StepSeries(n, directions, rates, charges.length);
		this.exponential = new StepExponential(n, directions, rates);
	}

	/**
	 * Fills curves and derivatives in the layout of `RunKernel`, at ascending times.
	 * @returns false where a constant is too large for the times (more than 2⁶⁰ of its time constants in one interval).
	 */
	run(
		constants: Float64Array,
		charge: Float64Array,
		timesS: Float64Array,
		out: { curves: Float64Array; rateDerivatives: Float64Array; chargeDerivatives: Float64Array },
		watch: Watch | null = null
	): boolean {
		const { n, rates, charges, state } = this;
		const times = timesS.length;
		state.fill(0);
		state.set(charge);
		charges.forEach((species, q) => (state[(1 + rates.length + q) * n + species] = 1));
		let at = 0;
		this.made = NaN;
		for (let k = 0; k < times; k++) {
			watch?.();
			const h = timesS[k] - at;
			if (h > 0 && !this.advance(constants, h, timesS[k])) return false;
			for (let i = 0; i < n; i++) {
				out.curves[k * n + i] = state[i];
				for (let r = 0; r < rates.length; r++)
					out.rateDerivatives[(r * times + k) * n + i] = state[(1 + r) * n + i];
				for (let q = 0; q < charges.length; q++)
					out.chargeDerivatives[(q * times + k) * n + i] = state[(1 + rates.length + q) * n + i];
			}
			at = timesS[k];
		}
		return true;
	}

	/** Moves the state on by h: by series on vectors while q h is moderate, else by squaring matrices. */
	private advance(constants: Float64Array, h: number, t: number): boolean {
		const { n, rates, state, c, next } = this;
		const { e, l, end, order, outflow } = this.exponential;
		const q = this.exponential.largestOutflow(constants);
		if (q * h <= VECTORS_UP_TO) {
			this.onVectors.advance(constants, q, outflow, h, state);
			return true;
		}
		// Equally spaced times differ by rounding of the clock alone, and share one exponential.
		if (!(Math.abs(h - this.made) <= SAME_STEP * t)) {
			if (!this.exponential.compute(constants, h)) return false;
			this.made = h;
		}
		for (let i = 0; i < n; i++) c[i] = state[order[i]];
		for (let row = 0; row * n < state.length; row++) {
			next.fill(0);
			for (let i = 0; i < n; i++)
				for (let j = 0; j < end[i]; j++) next[i] += e[i * n + j] * state[row * n + order[j]];
			if (row > 0 && row <= rates.length) multiplyAdd(l, (row - 1) * n * n, c, n, next, 0);
			for (let i = 0; i < n; i++) state[row * n + order[i]] = next[i];
		}
		return true;
	}
}

/** out[target + i] += Σ_j X_ij v_j. */
function multiplyAdd(
	x: Float64Array,
	from: number,
	v: Float64Array,
	n: number,
	out: Float64Array,
	target: number
): void {
	for (let i = 0; i < n; i++) {
		let sum = 0;
		for (let j = 0; j < n; j++) sum += x[from + i * n + j] * v[j];
		out[target + i] += sum;
	}
}
