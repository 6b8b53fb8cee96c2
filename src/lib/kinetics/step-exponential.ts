/**
 * E = e^{Kh} and its derivatives L_d = ∂E/∂ ln k_d for one interval, by squaring.
 *
 *     E = (e^{−qh/2ˢ} Σ_m Aᵐ/m!)^{2ˢ},   A = (K + qI) h/2ˢ ≥ 0,   q = largest outflow
 *     L_d: L ← A L + dA M term by term, then L ← E L + L E with each squaring
 *
 * A has no negative entry, so the series of E has no cancellation; after each squaring the diagonals are rebuilt from what has
 * left (`step-balance.ts`). Species stand in the order of flow, so that all matrices are block lower triangular; L_d has no
 * entry above the block of its reactant nor to the right of it.
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
import { componentsOf } from './components';
import { StepBalance, type Direction } from './step-balance';

/** ‖A‖ ≤ 1 after scaling; 18 terms leave 1/19! ≈ 1e-17. */
const TERMS = 18;

export class StepExponential {
	readonly e: Float64Array;
	readonly l: Float64Array;
	/** 1/s out of each species, of the constants last asked about. */
	readonly outflow: Float64Array;
	/** Species in the order of flow, where all matrices are block lower triangular. */
	readonly order: number[];
	readonly place: number[];
	/** Where the block of each place begins and ends. */
	readonly begin: Int32Array;
	readonly end: Int32Array;
	private readonly a: Float64Array;
	private readonly term: Float64Array;
	private readonly spare: Float64Array;
	private readonly lTerm: Float64Array;
	private readonly lSpare: Float64Array;
	private readonly balance: StepBalance;

	/** @param rates directions to differentiate by */
	constructor(
		private readonly n: number,
		private readonly directions: Direction[],
		private readonly rates: number[]
	) {
		const square = n * n;
		this.a = new Float64Array(square);
		this.e = new Float64Array(square);
		this.term = new Float64Array(square);
		this.spare = new Float64Array(square);
		this.l = new Float64Array(rates.length * square);
		this.lTerm = new Float64Array(rates.length * square);
		this.lSpare = new Float64Array(square);
		this.outflow = new Float64Array(n);
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

	/** True where every block of several species keeps its mass, so that no rounding grows with q h. */
	get balanced(): boolean {
		return this.balance.all;
	}

	/** q; fills `outflow`. */
	largestOutflow(constants: Float64Array): number {
		const { outflow, directions } = this;
		outflow.fill(0);
		for (let d = 0; d < directions.length; d++) outflow[directions[d].from] += constants[d];
		let q = 0;
		for (let i = 0; i < outflow.length; i++) q = Math.max(q, outflow[i]);
		return q;
	}

	/** E and every L_d for one interval, row-major; false where q h is too large to square. */
	compute(constants: Float64Array, h: number): boolean {
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
		this.balance.rebuild(constants, scaled, e, l);
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
			this.balance.rebuild(constants, scaled * 2 ** (s + 1), e, l);
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

/** Species grouped by strongly connected component, upstream first. */
function flowOrder(n: number, directions: readonly Direction[]): number[][] {
	const successors: number[][] = Array.from({ length: n }, () => []);
	for (const { from, products } of directions) for (const { to } of products) successors[from].push(to);
	return componentsOf(successors).blocks.map((block) => Array.from(block));
}
