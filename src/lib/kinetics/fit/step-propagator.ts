/**
 * Curves and derivatives from time to time by the exponential of the rate matrix itself, where its eigenbasis is of no use:
 * repeated rates, and loops out of detailed balance (complex modes).
 *
 *     E = e^{Kh} = (e^{−qh/2ˢ} Σ_m Aᵐ/m!)^{2ˢ},   A = (K + qI) h/2ˢ ≥ 0,   q = largest outflow
 *     L_d = ∂E/∂ ln k_d: L ← A L + dA M term by term, then L ← E L + L E with each squaring
 *     c ← E c,   s_d ← E s_d + L_d c
 *
 * A has no negative entry, so the series of E has no cancellation, whatever the rates; after each squaring the diagonals are
 * rebuilt from what has left (`step-balance.ts`), so that no rounding grows with q h. Species stand in the order of flow, so that
 * all matrices are block lower triangular; L_d has no entry above the block of its reactant nor to the right of it.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | A, Aᵐ/m! | `a`, `term` |
 * | E | `e` |
 * | L_d and its terms | `l`, `lTerm` (one n × n block per direction asked for) |
 *
 * Sources: Jensen, Skand. Aktuarietidskr. 36 (1953) 87 (uniformisation); Xue & Ye, Numer. Math. 124 (2013) 393 (non-negative
 * scaling and squaring); Mathias, SIAM J. Matrix Anal. Appl. 14 (1993) 1061 and Al-Mohy & Higham, ibid. 30 (2009) 1639
 * (derivative by differentiating the algorithm).
 */
import type { Watch } from './cancelled';
import { flowOrder, type Direction } from './spectral';
import { StepBalance } from './step-balance';
import { StepSeries } from './step-series';

/** Largest q h of an interval that is taken on vectors. */
const VECTORS_UP_TO = 200;

/** ‖A‖ ≤ 1 after scaling; 18 terms leave 1/19! ≈ 1e-17. */
const TERMS = 18;

export class StepPropagator {
	private readonly a: Float64Array;
	private readonly e: Float64Array;
	private readonly term: Float64Array;
	private readonly spare: Float64Array;
	private readonly l: Float64Array;
	private readonly lTerm: Float64Array;
	private readonly lSpare: Float64Array;
	private readonly c: Float64Array;
	private readonly next: Float64Array;
	/** Concentrations, then ∂c/∂ln k of each rate, then ∂c/∂c₀ of each charge. */
	private readonly state: Float64Array;
	private readonly outflow: Float64Array;
	private readonly onVectors: StepSeries;
	private readonly balance: StepBalance;
	/** Species in the order of flow, where all matrices are block lower triangular. */
	readonly order: number[];
	readonly place: number[];
	/** Where the block of each place begins and ends. */
	readonly begin: Int32Array;
	readonly end: Int32Array;

	constructor(
		private readonly n: number,
		private readonly directions: Direction[],
		private readonly rates: number[],
		private readonly charges: number[]
	) {
		const square = n * n;
		this.a = new Float64Array(square);
		this.e = new Float64Array(square);
		this.term = new Float64Array(square);
		this.spare = new Float64Array(square);
		this.l = new Float64Array(rates.length * square);
		this.lTerm = new Float64Array(rates.length * square);
		this.lSpare = new Float64Array(square);
		this.c = new Float64Array(n);
		this.next = new Float64Array(n);
		this.state = new Float64Array((1 + rates.length + charges.length) * n);
		this.outflow = new Float64Array(n);
		this.onVectors = new StepSeries(n, directions, rates, charges.length);
		const groups = flowOrder(n, directions);
		this.order = groups.flat();
		this.place = new Array<number>(n);
		this.begin = new Int32Array(n);
		this.end = new Int32Array(n);
		let first = 0;
		for (const group of groups) {
			group.forEach((species, i) => {
				this.place[species] = first + i;
				this.begin[first + i] = first;
				this.end[first + i] = first + group.length;
			});
			first += group.length;
		}
		this.balance = new StepBalance(n, directions, rates, this);
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
		for (let k = 0; k < times; k++) {
			watch?.();
			const h = timesS[k] - at;
			if (h > 0 && !this.advance(constants, h)) return false;
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
	private advance(constants: Float64Array, h: number): boolean {
		const { n, rates, state, outflow, c, next } = this;
		const q = this.largestOutflow(constants);
		if (q * h <= VECTORS_UP_TO) {
			this.onVectors.advance(constants, q, outflow, h, state);
			return true;
		}
		if (!this.exponential(constants, h)) return false;
		const { order } = this;
		for (let i = 0; i < n; i++) c[i] = state[order[i]];
		for (let row = 0; row * n < state.length; row++) {
			next.fill(0);
			for (let i = 0; i < n; i++)
				for (let j = 0; j < this.end[i]; j++) next[i] += this.e[i * n + j] * state[row * n + order[j]];
			if (row > 0 && row <= rates.length) multiplyAdd(this.l, (row - 1) * n * n, c, n, next, 0);
			for (let i = 0; i < n; i++) state[row * n + order[i]] = next[i];
		}
		return true;
	}

	private largestOutflow(constants: Float64Array): number {
		const { outflow, directions } = this;
		outflow.fill(0);
		for (let d = 0; d < directions.length; d++) outflow[directions[d].from] += constants[d];
		let q = 0;
		for (let i = 0; i < outflow.length; i++) q = Math.max(q, outflow[i]);
		return q;
	}

	/** E and every L_d for one interval. Row-major. */
	private exponential(constants: Float64Array, h: number): boolean {
		const { n, a, e, l, rates } = this;
		const q = this.assemble(constants);
		if (!(q * h < 2 ** 60)) return false;
		const squarings = Math.max(0, Math.ceil(Math.log2(2 * q * h || 1)));
		const scaled = h / 2 ** squarings;
		for (let i = 0; i < n * n; i++) a[i] *= scaled;
		this.series(constants, q, scaled);
		const shrink = Math.exp(-q * scaled);
		for (let i = 0; i < e.length; i++) e[i] *= shrink;
		for (let i = 0; i < l.length; i++) l[i] *= shrink;
		this.balance.damp(shrink);
		this.balance.rebuild(constants, this.outflow, this.order, scaled, e, l);
		for (let s = 0; s < squarings; s++) {
			this.balance.double(e, l);
			for (let r = 0; r < rates.length; r++) {
				// L_d has rows from its reactant's block on, and columns up to it.
				const at = this.place[this.directions[rates[r]].from];
				const [first, last] = [this.begin[at], this.end[at]];
				const block = r * n * n;
				this.product(e, 0, l, block, this.lSpare, first, last);
				this.product(l, block, e, 0, this.spare, first, last);
				for (let i = first; i < n; i++)
					for (let j = i * n; j < i * n + last; j++) l[block + j] = this.lSpare[j] + this.spare[j];
			}
			this.product(e, 0, e, 0, this.spare, 0, n);
			e.set(this.spare);
			this.balance.rebuild(constants, this.outflow, this.order, scaled * 2 ** (s + 1), e, l);
		}
		return true;
	}

	/** out = X Y for block lower triangular X, Y that begin at the offsets; rows from `first`, columns up to `last` alone. */
	private product(
		x: Float64Array,
		xFrom: number,
		y: Float64Array,
		yFrom: number,
		out: Float64Array,
		first: number,
		last: number
	): void {
		const { n, end } = this;
		for (let i = first; i < n; i++) {
			const row = i * n;
			for (let j = 0; j < last; j++) out[row + j] = 0;
			for (let l = 0; l < end[i]; l++) {
				const value = x[xFrom + row + l];
				if (value === 0) continue;
				const reach = Math.min(end[l], last);
				const from = yFrom + l * n;
				for (let j = 0; j < reach; j++) out[row + j] += value * y[from + j];
			}
		}
	}

	/** K + qI into `a`, formed without subtracting; returns q. */
	private assemble(constants: Float64Array): number {
		const { n, a, outflow, directions } = this;
		a.fill(0);
		const q = this.largestOutflow(constants);
		const { order, place } = this;
		for (let i = 0; i < n; i++) a[i * n + i] = q - outflow[order[i]];
		for (let d = 0; d < directions.length; d++) {
			const { from, products } = directions[d];
			for (let p = 0; p < products.length; p++)
				a[place[products[p].to] * n + place[from]] += constants[d] * products[p].coefficient;
		}
		return q;
	}

	private series(constants: Float64Array, q: number, scaled: number): void {
		const { n, a, e, term, spare, l, lTerm, lSpare, rates, directions } = this;
		e.fill(0);
		term.fill(0);
		for (let i = 0; i < n; i++) e[i * n + i] = term[i * n + i] = 1;
		l.fill(0);
		lTerm.fill(0);
		this.balance.begin(constants);
		for (let m = 1; m <= TERMS; m++) {
			this.balance.addTerm(constants, q, scaled, m, term, lTerm);
			for (let r = 0; r < rates.length; r++) {
				const block = r * n * n;
				const { from, products } = directions[rates[r]];
				const at = this.place[from];
				const [first, last] = [this.begin[at], this.end[at]];
				this.product(a, 0, lTerm, block, lSpare, first, last);
				const k = constants[rates[r]] * scaled;
				for (let j = 0; j < last; j++) {
					const row = k * term[at * n + j];
					lSpare[at * n + j] -= row;
					for (let p = 0; p < products.length; p++)
						lSpare[this.place[products[p].to] * n + j] += row * products[p].coefficient;
				}
				for (let i = first; i < n; i++)
					for (let j = i * n; j < i * n + last; j++) l[block + j] += lTerm[block + j] = lSpare[j] / m;
			}
			this.product(a, 0, term, 0, spare, 0, n);
			for (let i = 0; i < n * n; i++) e[i] += term[i] = spare[i] / m;
		}
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
