/**
 * Curves and derivatives from time to time by the exponential of the rate matrix itself, where its eigenbasis is of no use:
 * repeated rates, and loops out of detailed balance (complex modes).
 *
 *     E = e^{Kh} = (e^{−qh/2ˢ} Σ_m Aᵐ/m!)^{2ˢ},   A = (K + qI) h/2ˢ ≥ 0,   q = largest outflow
 *     L_d = ∂E/∂ ln k_d: L ← A L + dA M term by term, then L ← E L + L E with each squaring
 *     c ← E c,   s_d ← E s_d + L_d c
 *
 * A has no negative entry, so the series of E has no cancellation, whatever the rates.
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
import type { Direction } from './spectral';

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
	}

	/**
	 * Fills curves and derivatives in the layout of `RunKernel`, at ascending times.
	 * @returns false where a constant is too large for the times (more than 2⁶⁰ of its time constants in one interval).
	 */
	run(
		constants: Float64Array,
		charge: Float64Array,
		timesS: Float64Array,
		out: { curves: Float64Array; rateDerivatives: Float64Array; chargeDerivatives: Float64Array }
	): boolean {
		const { n, rates, charges, c, next } = this;
		const times = timesS.length;
		c.set(charge);
		let at = 0;
		for (let k = 0; k < times; k++) {
			const h = timesS[k] - at;
			const before = k - 1;
			const moved = h > 0;
			if (moved && !this.exponential(constants, h)) return false;
			for (let r = 0; r < rates.length; r++) {
				const target = (r * times + k) * n;
				const source = (r * times + before) * n;
				this.carry(out.rateDerivatives, source, target, before >= 0, moved);
				if (moved) multiplyAdd(this.l, r * n * n, c, n, out.rateDerivatives, target);
			}
			for (let q = 0; q < charges.length; q++) {
				const target = (q * times + k) * n;
				if (before >= 0) this.carry(out.chargeDerivatives, (q * times + before) * n, target, true, moved);
				else
					for (let i = 0; i < n; i++)
						out.chargeDerivatives[target + i] = moved ? this.e[i * n + charges[q]] : i === charges[q] ? 1 : 0;
			}
			if (moved) {
				next.fill(0);
				multiplyAdd(this.e, 0, c, n, next, 0);
				c.set(next);
			}
			for (let i = 0; i < n; i++) out.curves[k * n + i] = c[i];
			at = timesS[k];
		}
		return true;
	}

	/** row ← E row of the time before, or zero at the first. */
	private carry(rows: Float64Array, source: number, target: number, known: boolean, moved: boolean): void {
		const { n, next } = this;
		next.fill(0);
		if (known) {
			for (let i = 0; i < n; i++) {
				if (!moved) {
					next[i] = rows[source + i];
					continue;
				}
				let sum = 0;
				for (let j = 0; j < n; j++) sum += this.e[i * n + j] * rows[source + j];
				next[i] = sum;
			}
		}
		for (let i = 0; i < n; i++) rows[target + i] = next[i];
	}

	/** E and every L_d for one interval. Row-major. */
	private exponential(constants: Float64Array, h: number): boolean {
		const { n, a, e, l, rates } = this;
		const q = this.assemble(constants);
		if (!(q * h < 2 ** 60)) return false;
		const squarings = Math.max(0, Math.ceil(Math.log2(2 * q * h || 1)));
		const scaled = h / 2 ** squarings;
		for (let i = 0; i < n * n; i++) a[i] *= scaled;
		this.series(constants, scaled);
		const shrink = Math.exp(-q * scaled);
		for (let i = 0; i < e.length; i++) e[i] *= shrink;
		for (let i = 0; i < l.length; i++) l[i] *= shrink;
		for (let s = 0; s < squarings; s++) {
			for (let r = 0; r < rates.length; r++) {
				const block = r * n * n;
				product(e, 0, l, block, n, this.lSpare);
				product(l, block, e, 0, n, this.spare);
				for (let i = 0; i < n * n; i++) l[block + i] = this.lSpare[i] + this.spare[i];
			}
			product(e, 0, e, 0, n, this.spare);
			e.set(this.spare);
		}
		return true;
	}

	/** K + qI into `a`, formed without subtracting; returns q. */
	private assemble(constants: Float64Array): number {
		const { n, a, next, directions } = this;
		next.fill(0);
		a.fill(0);
		for (let d = 0; d < directions.length; d++) next[directions[d].from] += constants[d];
		let q = 0;
		for (let i = 0; i < n; i++) q = Math.max(q, next[i]);
		for (let i = 0; i < n; i++) a[i * n + i] = q - next[i];
		for (let d = 0; d < directions.length; d++) {
			const { from, products } = directions[d];
			for (let p = 0; p < products.length; p++)
				a[products[p].to * n + from] += constants[d] * products[p].coefficient;
		}
		return q;
	}

	private series(constants: Float64Array, scaled: number): void {
		const { n, a, e, term, spare, l, lTerm, lSpare, rates, directions } = this;
		e.fill(0);
		term.fill(0);
		for (let i = 0; i < n; i++) e[i * n + i] = term[i * n + i] = 1;
		l.fill(0);
		lTerm.fill(0);
		for (let m = 1; m <= TERMS; m++) {
			for (let r = 0; r < rates.length; r++) {
				const block = r * n * n;
				product(a, 0, lTerm, block, n, lSpare);
				const { from, products } = directions[rates[r]];
				const k = constants[rates[r]] * scaled;
				for (let j = 0; j < n; j++) {
					const row = k * term[from * n + j];
					lSpare[from * n + j] -= row;
					for (let p = 0; p < products.length; p++)
						lSpare[products[p].to * n + j] += row * products[p].coefficient;
				}
				for (let i = 0; i < n * n; i++) l[block + i] += lTerm[block + i] = lSpare[i] / m;
			}
			product(a, 0, term, 0, n, spare);
			for (let i = 0; i < n * n; i++) e[i] += term[i] = spare[i] / m;
		}
	}
}

/** out = X Y for n × n row-major blocks that begin at the offsets. */
function product(
	x: Float64Array,
	xFrom: number,
	y: Float64Array,
	yFrom: number,
	n: number,
	out: Float64Array
): void {
	for (let i = 0; i < n; i++)
		for (let j = 0; j < n; j++) {
			let sum = 0;
			for (let l = 0; l < n; l++) sum += x[xFrom + i * n + l] * y[yFrom + l * n + j];
			out[i * n + j] = sum;
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
