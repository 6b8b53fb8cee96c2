/**
 * The linear subproblem of the Levenberg–Marquardt method: min ‖J p + r‖ subject to ‖D p‖ ≤ Δ.
 *
 * J is factored once (pivoted QR); for each trial μ the triangle [R; √μ D] is reduced by Givens rotations, so that JᵀJ is
 * never formed. μ solves φ(μ) = ‖D p(μ)‖ − Δ = 0 to 10 % by Newton steps kept between a lower and an upper bound.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | R, Qᵀr | `r`, `qtr` |
 * | D      | `d` (in pivoted order, floor 1 for a zero column) |
 * | S      | `s`, the triangle of [R; √μ D] |
 *
 * Source: Moré, Lecture Notes in Mathematics 630 (1978) 105–116, sections 3 and 5.
 */
import { backSubstitute, extractR, forwardSubstituteTransposed, norm, pivotedQr } from './linear-algebra';

export class TrustStep {
	/** The step over the free parameters, in the order in which they were given. */
	readonly step: Float64Array;
	private readonly a: Float64Array;
	private readonly b: Float64Array;
	private readonly diagonal: Float64Array;
	private readonly pivot: Int32Array;
	private readonly norms: Float64Array;
	private readonly r: Float64Array;
	private readonly s: Float64Array;
	private readonly d: Float64Array;
	private readonly qtr: Float64Array;
	private readonly p: Float64Array;
	private readonly row: Float64Array;
	private readonly rhs: Float64Array;
	private readonly v: Float64Array;
	private n = 0;
	private rank = 0;
	private free: Int32Array = new Int32Array(0);

	constructor(
		private readonly m: number,
		size: number
	) {
		this.a = new Float64Array(m * size);
		this.b = new Float64Array(m);
		this.diagonal = new Float64Array(size);
		this.pivot = new Int32Array(size);
		this.norms = new Float64Array(2 * size);
		this.r = new Float64Array(size * size);
		this.s = new Float64Array(size * size);
		this.d = new Float64Array(size);
		this.qtr = new Float64Array(size);
		this.p = new Float64Array(size);
		this.row = new Float64Array(size);
		this.rhs = new Float64Array(size);
		this.v = new Float64Array(size);
		this.step = new Float64Array(size);
	}

	/** Factors the free columns of the Jacobian. */
	factor(
		jacobian: Float64Array,
		residuals: Float64Array,
		free: Int32Array,
		count: number,
		watch: (() => void) | null = null
	): void {
		const m = this.m;
		this.n = count;
		this.free = free;
		for (let k = 0; k < count; k++) {
			const from = free[k] * m;
			for (let i = 0; i < m; i++) this.a[k * m + i] = jacobian[from + i];
		}
		this.b.set(residuals);
		pivotedQr(this.a, m, count, this.b, this.diagonal, this.pivot, this.norms, watch);
		extractR(this.a, m, count, this.diagonal, this.r);
		for (let i = 0; i < count; i++) this.qtr[i] = i < m ? this.b[i] : 0;
		this.rank = 0;
		while (this.rank < count && this.diagonal[this.rank] !== 0) this.rank++;
	}

	/** Fills `step` for this trust radius and returns μ. `guess` is the μ of the step before. */
	solve(scale: Float64Array, radius: number, guess: number): number {
		const { n, p } = this;
		for (let k = 0; k < n; k++) this.d[k] = scale[this.free[this.pivot[k]]] || 1;
		backSubstitute(this.r, n, this.rank, this.qtr, p);
		const excess = this.scaledLength() - radius;
		let mu = 0;
		if (excess > 0.1 * radius) {
			const bounds = this.startingBounds(excess, radius);
			mu = this.search(radius, guess, bounds);
		}
		for (let k = 0; k < n; k++) this.step[this.pivot[k]] = -p[k];
		return mu;
	}

	/** ‖J s‖ for a step over all parameters that moves free ones only, from the triangle. */
	lengthAlong(s: Float64Array): number {
		const { n, r } = this;
		let sum = 0;
		for (let i = 0; i < n; i++) {
			let row = 0;
			for (let j = i; j < n; j++) row += r[j * n + i] * s[this.free[this.pivot[j]]];
			sum += row * row;
		}
		return Math.sqrt(sum);
	}

	private scaledLength(): number {
		let sum = 0;
		for (let k = 0; k < this.n; k++) sum += (this.d[k] * this.p[k]) ** 2;
		return Math.sqrt(sum);
	}

	private startingBounds(excess: number, radius: number): { low: number; high: number } {
		const { n, r, d, v, qtr } = this;
		let low = 0;
		if (this.rank === n) {
			const length = this.scaledLength();
			for (let k = 0; k < n; k++) v[k] = (d[k] * d[k] * this.p[k]) / length;
			forwardSubstituteTransposed(r, n, v);
			const size = norm(v, 0, n);
			low = excess / (radius * size * size);
		}
		for (let j = 0; j < n; j++) {
			let sum = 0;
			for (let i = 0; i <= j; i++) sum += r[j * n + i] * qtr[i];
			v[j] = sum / d[j];
		}
		const gradient = norm(v, 0, n);
		return { low, high: gradient / radius || Number.MIN_VALUE / Math.min(radius, 0.1) };
	}

	private search(radius: number, guess: number, bounds: { low: number; high: number }): number {
		const { n, d, p, v } = this;
		let { low, high } = bounds;
		let mu = Math.min(Math.max(guess, low), high);
		if (mu === 0) mu = Math.max(1e-3 * high, low);
		let previous = Infinity;
		for (let k = 0; k < 10; k++) {
			if (mu === 0) mu = Math.max(Number.MIN_VALUE, 1e-3 * high);
			this.damped(mu);
			const length = this.scaledLength();
			const excess = length - radius;
			if (Math.abs(excess) <= 0.1 * radius) break;
			if (low === 0 && excess <= previous && previous < 0) break;
			for (let i = 0; i < n; i++) v[i] = (d[i] * d[i] * p[i]) / length;
			forwardSubstituteTransposed(this.s, n, v);
			const size = norm(v, 0, n);
			const correction = excess / (radius * size * size);
			if (excess > 0) low = Math.max(low, mu);
			else high = Math.min(high, mu);
			previous = excess;
			mu = Math.max(low, mu + correction);
		}
		return mu;
	}

	/** Solves (RᵀR + μ D²) p = Rᵀ Qᵀr by rotating √μ D into R; leaves the triangle in `s`. */
	private damped(mu: number): void {
		const { n, s, row, rhs, d } = this;
		s.set(this.r.subarray(0, n * n));
		for (let k = 0; k < n; k++) rhs[k] = this.qtr[k];
		const root = Math.sqrt(mu);
		for (let j = 0; j < n; j++) {
			row.fill(0, j, n);
			row[j] = root * d[j];
			this.eliminate(j);
		}
		let rank = n;
		for (let k = 0; k < n; k++) if (s[k * n + k] === 0 && rank === n) rank = k;
		backSubstitute(s, n, rank, rhs, this.p);
	}

	private eliminate(from: number): void {
		const { n, s, row, rhs } = this;
		let carried = 0;
		for (let k = from; k < n; k++) {
			if (row[k] === 0) continue;
			const pivot = s[k * n + k];
			const length = Math.hypot(pivot, row[k]);
			const c = pivot / length;
			const t = row[k] / length;
			s[k * n + k] = length;
			const b = rhs[k];
			rhs[k] = c * b + t * carried;
			carried = c * carried - t * b;
			for (let j = k + 1; j < n; j++) {
				const upper = s[j * n + k];
				s[j * n + k] = c * upper + t * row[j];
				row[j] = c * row[j] - t * upper;
			}
		}
	}
}
