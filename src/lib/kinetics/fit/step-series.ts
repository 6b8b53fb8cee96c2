/**
 * One interval of `StepPropagator` on vectors instead of matrices: cheaper for many species while q h is moderate.
 *
 *     c(h) = e^{−qh} Σ_m Tₘ,  Tₘ = A Tₘ₋₁/m,  T₀ = c;   s(h) = e^{−qh} Σ_m Uₘ,  Uₘ = (A Uₘ₋₁ + dA Tₘ₋₁)/m,  U₀ = s
 *
 * with A = (K + qI) h ≥ 0 applied flow by flow. Long intervals are cut so that each piece needs less than about a hundred terms.
 * Source: Jensen (1953), see `step-propagator.ts`.
 */
import type { Direction } from './spectral';

/** Largest q h of one piece. */
const PIECE = 25;
const MAX_TERMS = 400;

export class StepSeries {
	private readonly term: Float64Array;
	private readonly next: Float64Array;
	private readonly diagonal: Float64Array;
	private readonly rows: number;

	/** State rows: the concentrations, then one row per rate, then one per charge. */
	constructor(
		private readonly n: number,
		private readonly directions: Direction[],
		private readonly rates: number[],
		charges: number
	) {
		this.rows = 1 + rates.length + charges;
		this.term = new Float64Array(this.rows * n);
		this.next = new Float64Array(this.rows * n);
		this.diagonal = new Float64Array(n);
	}

	/** Moves `state` on by h. q is the largest outflow. */
	advance(constants: Float64Array, q: number, outflow: Float64Array, h: number, state: Float64Array): void {
		const pieces = Math.max(1, Math.ceil((q * h) / PIECE));
		for (let i = 0; i < this.n; i++) this.diagonal[i] = ((q - outflow[i]) * h) / pieces;
		for (let piece = 0; piece < pieces; piece++) this.piece(constants, (q * h) / pieces, h / pieces, state);
	}

	private piece(constants: Float64Array, exponent: number, h: number, state: Float64Array): void {
		const { n, rows, rates, directions } = this;
		let term = this.term;
		let next = this.next;
		term.set(state);
		for (let m = 1; m < MAX_TERMS; m++) {
			for (let r = 0; r < rows; r++) this.apply(constants, h, term, next, r * n);
			for (let r = 0; r < rates.length; r++) {
				const { from, products } = directions[rates[r]];
				const flow = constants[rates[r]] * h * term[from];
				const row = (r + 1) * n;
				next[row + from] -= flow;
				for (let p = 0; p < products.length; p++)
					next[row + products[p].to] += flow * products[p].coefficient;
			}
			let size = 0;
			let total = 0;
			for (let i = 0; i < next.length; i++) {
				next[i] /= m;
				state[i] += next[i];
				size += Math.abs(next[i]);
				total += Math.abs(state[i]);
			}
			[term, next] = [next, term];
			if (m > exponent && size <= 1e-18 * total) break;
		}
		const shrink = Math.exp(-exponent);
		for (let i = 0; i < state.length; i++) state[i] *= shrink;
	}

	private apply(constants: Float64Array, h: number, v: Float64Array, out: Float64Array, row: number): void {
		const { n, diagonal, directions } = this;
		for (let i = 0; i < n; i++) out[row + i] = diagonal[i] * v[row + i];
		for (let d = 0; d < directions.length; d++) {
			const { from, products } = directions[d];
			const flow = constants[d] * h * v[row + from];
			for (let p = 0; p < products.length; p++) out[row + products[p].to] += flow * products[p].coefficient;
		}
	}
}
