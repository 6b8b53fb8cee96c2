/**
 * Modes of one strongly connected block in detailed balance, for the inner loop of a fit: nothing is allocated after the start.
 *
 * With π_i r_ij = π_j r_ji the matrix S = D^{−1/2} K D^{1/2}, D = diag π, is symmetric and S = −F Fᵀ, one column of F for each
 * reversible pair, (√r_ij at i, −√r_ji at j), and one for each way out, √exit_i at i. Singular values of F by one-sided Jacobi
 * rotations give the rates, slow ones beside fast ones, without subtracting: a pre-equilibrium a 10⁸ times faster than the
 * step that follows costs no digits. Of the modes u the differences
 *     W (e_j − e_i) = Uᵀ D^{−1/2} (e_j − e_i) = −(Uᵀ F)_pair / √(π_i r_ij)
 * that the derivatives need come from the rotations too, not from two nearly equal numbers.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | r_ij | `rate[i·m + j]` |
 * | ½ ln π | `weight` |
 * | F, by columns or by rows | `factor` |
 * | U | `vectors` (one array a mode) |
 *
 * Sources: Wei & Prater, Adv. Catal. 13 (1962) 203 (symmetry by detailed balance); Demmel & Veselić, SIAM J. Matrix Anal.
 * Appl. 13 (1992) 1204 (relative accuracy of one-sided Jacobi).
 */
import { oneSidedJacobi } from '../jacobi';
import type { Direction } from './spectral';

/** Largest mismatch of ½ ln π around a loop, beside 1 + |½ ln π|. */
const BALANCE = 1e-13;

const arrays = (count: number, length: number) =>
	Array.from({ length: count }, () => new Float64Array(length));

export class BalancedBlock {
	readonly m: number;
	/** Rates ≤ 0 of the modes. */
	readonly rates: Float64Array;
	/** ½ ln π of each member, the first at 0. */
	readonly weight: Float64Array;
	/** Whether the scheme allows balance at all: every step within the block has its way back and stays one to one. */
	readonly possible: boolean;
	/** Within the block: direction, and the members that it leaves and reaches. */
	readonly inner: { direction: number; from: number; to: number }[] = [];
	private readonly outer: { direction: number; from: number }[] = [];
	private readonly pairs: [number, number][] = [];
	private readonly exitMembers: number[];
	private readonly byRows: boolean;
	private readonly rate: Float64Array;
	private readonly exits: Float64Array;
	private readonly factor: Float64Array[];
	private readonly turns: Float64Array[];
	private readonly root: Float64Array;
	private readonly known: Uint8Array;
	private readonly queue: Int32Array;
	/** Which singular vector stands for the stationary mode, −1 where there is a way out. */
	private stationary = -1;

	/** @param members species of the block */
	constructor(
		readonly members: number[],
		directions: Direction[]
	) {
		const m = (this.m = members.length);
		this.possible = this.readDirections(directions);
		this.exitMembers = [...new Set(this.outer.map((o) => o.from))].sort((a, b) => a - b);
		const columns = this.pairs.length + this.exitMembers.length;
		this.byRows = columns >= m;
		this.factor = this.byRows ? arrays(m, columns) : arrays(columns, m);
		this.turns = this.byRows ? arrays(m, m) : arrays(columns, columns);
		this.rates = new Float64Array(m);
		this.weight = new Float64Array(m);
		this.rate = new Float64Array(m * m);
		this.exits = new Float64Array(m);
		this.root = new Float64Array(m);
		this.known = new Uint8Array(m);
		this.queue = new Int32Array(m);
	}

	/** Sorts the directions into steps within the block and ways out; false where balance is out of the question. */
	private readDirections(directions: Direction[]): boolean {
		const { members, m } = this;
		const there = new Uint8Array(m * m);
		let possible = true;
		directions.forEach(({ from, products }, direction) => {
			const i = members.indexOf(from);
			if (i < 0) return;
			const within = products.filter((p) => p.coefficient !== 0 && members.includes(p.to));
			if (within.length === 0) {
				this.outer.push({ direction, from: i });
				return;
			}
			const to = members.indexOf(within[0].to);
			if (within.length > 1 || within[0].coefficient !== 1 || to === i) possible = false;
			this.inner.push({ direction, from: i, to });
			there[i * m + to] = 1;
		});
		for (let i = 0; i < m; i++)
			for (let j = i + 1; j < m; j++) {
				if (there[i * m + j] !== there[j * m + i]) possible = false;
				if (there[i * m + j]) this.pairs.push([i, j]);
			}
		return possible;
	}

	/** Modes for these constants; false where they are out of balance. */
	turn(constants: Float64Array): boolean {
		if (!this.possible) return false;
		this.gather(constants);
		if (!this.balance()) return false;
		this.fillFactor();
		oneSidedJacobi(this.factor, this.turns);
		this.findStationary();
		for (let a = 0; a < this.m; a++) this.rates[a] = a === this.stationary ? 0 : -(this.size(a) ** 2);
		return true;
	}

	private gather(constants: Float64Array): void {
		const { m, rate, exits, inner, outer } = this;
		rate.fill(0);
		exits.fill(0);
		for (let d = 0; d < inner.length; d++)
			rate[inner[d].from * m + inner[d].to] += constants[inner[d].direction];
		for (let d = 0; d < outer.length; d++) exits[outer[d].from] += constants[outer[d].direction];
	}

	/** ½ ln π along a spanning tree of the block, then a check of detailed balance on every pair. */
	private balance(): boolean {
		const { m, rate, weight, known, queue, pairs } = this;
		known.fill(0);
		weight[0] = 0;
		known[0] = 1;
		queue[0] = 0;
		let size = 1;
		for (let head = 0; head < size; head++) {
			const i = queue[head];
			for (let j = 0; j < m; j++) {
				if (known[j] || !(rate[i * m + j] > 0 && rate[j * m + i] > 0)) continue;
				weight[j] = weight[i] + 0.5 * Math.log(rate[i * m + j] / rate[j * m + i]);
				known[j] = 1;
				queue[size++] = j;
			}
		}
		if (size < m) return false;
		for (let p = 0; p < pairs.length; p++) {
			const [i, j] = pairs[p];
			const broken = weight[j] - weight[i] - 0.5 * Math.log(rate[i * m + j] / rate[j * m + i]);
			if (!(Math.abs(broken) <= BALANCE * (1 + Math.abs(weight[i]) + Math.abs(weight[j])))) return false;
		}
		return true;
	}

	private fillFactor(): void {
		const { m, byRows, factor, turns, pairs, exitMembers, rate, exits } = this;
		for (let q = 0; q < factor.length; q++) {
			factor[q].fill(0);
			turns[q].fill(0);
			turns[q][q] = 1;
		}
		for (let p = 0; p < pairs.length; p++) {
			const [i, j] = pairs[p];
			const out = Math.sqrt(rate[i * m + j]);
			const back = -Math.sqrt(rate[j * m + i]);
			if (byRows) {
				factor[i][p] = out;
				factor[j][p] = back;
			} else {
				factor[p][i] = out;
				factor[p][j] = back;
			}
		}
		for (let e = 0; e < exitMembers.length; e++) {
			const i = exitMembers[e];
			const column = pairs.length + e;
			if (byRows) factor[i][column] = Math.sqrt(exits[i]);
			else factor[column][i] = Math.sqrt(exits[i]);
		}
	}

	/** Without a way out one mode is stationary: √π exactly, in the place of the smallest row or after the columns. */
	private findStationary(): void {
		const { m, byRows, factor, exitMembers, root, weight } = this;
		this.stationary = -1;
		if (exitMembers.length > 0) return;
		this.stationary = m - 1;
		if (byRows) {
			this.stationary = 0;
			for (let q = 1; q < m; q++)
				if (length(factor[q]) < length(factor[this.stationary])) this.stationary = q;
		}
		let top = weight[0];
		for (let i = 1; i < m; i++) top = Math.max(top, weight[i]);
		for (let i = 0; i < m; i++) root[i] = Math.exp(weight[i] - top);
		const size = length(root);
		for (let i = 0; i < m; i++) root[i] /= size;
	}

	private size(a: number): number {
		return length(this.factor[a]);
	}

	/** u_a of member i. */
	vector(a: number, i: number): number {
		if (a === this.stationary) return this.root[i];
		return this.byRows ? this.turns[a][i] : this.factor[a][i] / this.size(a);
	}

	/** W (e_to − e_from) of mode a, for the step within the block at that place of `inner`. */
	difference(a: number, place: number): number {
		if (a === this.stationary) return 0;
		const { from, to } = this.inner[place];
		const { m, pairs, byRows, factor, turns, weight, rate } = this;
		let p = 0;
		while (!(pairs[p][0] === from && pairs[p][1] === to) && !(pairs[p][0] === to && pairs[p][1] === from))
			p++;
		const image = byRows ? factor[a][p] : turns[a][p] * this.size(a);
		const [i, j] = pairs[p];
		const value = -image / (Math.exp(weight[i]) * Math.sqrt(rate[i * m + j]));
		return i === from ? value : -value;
	}
}

function length(v: Float64Array): number {
	let sum = 0;
	for (let i = 0; i < v.length; i++) sum += v[i] * v[i];
	return Math.sqrt(sum);
}
