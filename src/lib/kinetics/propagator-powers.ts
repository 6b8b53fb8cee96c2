/**
 * The powers e^{K h₀ 2^m} of `propagator.ts`, each the square of the one before, without any subtraction.
 *
 *     P_0 = e^{−q h₀} Σ_m ((K + qI) h₀)^m / m!            (uniformisation, q h₀ ≤ 1)
 *     P_{m+1} = P_m²,   x_{m+1} = x_m + x_m P_m          (x: what has left the component by then)
 *     P_jj  = 1 − x_j − Σ_{i≠j} P_ij                     when that sum is ≤ ½, else the column is divided by its total
 *
 * A single-species component has P_jj = e^{−k h} itself. Where steps split within a component (A → 2 B), the sums are weighted
 * (`block-weights.ts`).
 *
 * | symbol | name here |
 * | --- | --- |
 * | q, h₀ | `shift`, `baseStepS` |
 * | P_m, x_m | `Level.p` (row-major), `Level.x` |
 *
 * Sources: W. K. Grassmann, M. I. Taksar and D. P. Heyman, Oper. Res. 33 (1985) 1107; J. Xue and Q. Ye, Math. Comp. 82 (2013)
 * 1577.
 */
import type { BlockWeights } from './block-weights';
import type { Components } from './components';

export interface Level {
	p: Float64Array;
	x: Float64Array;
}

/** What a propagator knows of its system, flow by flow. */
export interface FlowTable {
	readonly n: number;
	readonly shift: number;
	readonly baseStepS: number;
	readonly parts: Components;
	readonly from: Int32Array;
	readonly to: Int32Array;
	/** Rate times coefficient, 1/s. */
	readonly rate: Float64Array;
	/** q − outflow, 1/s. */
	readonly stay: Float64Array;
	readonly outflow: Float64Array;
}

export class PropagatorPowers {
	private readonly levels: Level[] = [];

	constructor(
		private readonly table: FlowTable,
		private readonly balance: BlockWeights
	) {}

	/** How many have been made so far. */
	get count(): number {
		return this.levels.length;
	}

	/** e^{K h} for h = baseStepS · 2^index; made when first asked for. */
	level(index: number): Level {
		if (this.levels.length === 0) this.levels.push(this.firstLevel());
		while (this.levels.length <= index)
			this.levels.push(this.squared(this.levels[this.levels.length - 1], this.levels.length));
		return this.levels[index];
	}

	private firstLevel(): Level {
		const { n, shift, baseStepS } = this.table;
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
		const { n, shift, from, to, rate, stay, parts } = this.table;
		const { exits, weights } = this.balance;
		for (let j = 0; j < n; j++) {
			let sum = shift * xTerm[j];
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
		const { n, parts } = this.table;
		const { weights } = this.balance;
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
		const { n, parts, outflow, baseStepS } = this.table;
		const { weights } = this.balance;
		const stepS = baseStepS * Math.pow(2, index);
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
