/**
 * Eigenbasis of a first-order rate matrix for the inner loop of a fit: same topology, new constants, nothing allocated.
 *
 * Problem: K = V Λ V⁻¹ for thousands of sets of constants. Strongly connected components, taken in the order of flow, make K
 * block lower triangular. A block of one species has its eigenvalue on the diagonal; a block whose constants obey detailed
 * balance is turned by one-sided Jacobi rotations (`balanced-block.ts`). In the basis of the blocks K becomes a triangular T with the eigenvalues on its diagonal, whose eigenvectors follow by substitution:
 *     Xᵢⱼ = Σ_{j≤l<i} Tᵢₗ Xₗⱼ / (λⱼ − λᵢ).
 * Where eigenvalues of coupled blocks nearly coincide, X grows without limit; the routine then declines (returns false) and
 * the caller uses the confluent or block-matrix way. It also declines where a block breaks detailed balance.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | K (in the order of flow) | `k` |
 * | block bases and inverse  | `basis`, `basisInverse` |
 * | T, X, X⁻¹ | `t`, `x`, `xInverse` |
 * | V, V⁻¹, Λ | `vectors`, `inverse`, `rates` (species order) |
 *
 * Sources: Tarjan, SIAM J. Comput. 1 (1972) 146; Golub & Van Loan, Matrix Computations, 7.6 (triangular eigenvectors).
 */
import { componentsOf } from '../components';
import { BalancedBlock } from './balanced-block';

export interface Direction {
	/** Index of the species consumed. */
	from: number;
	products: { to: number; coefficient: number }[];
}

/** Growth |X|·|X⁻¹| beyond which the basis is given up: up to it derivatives hold 1e-11 of the charge (run-kernel-limits.test.ts). */
const MAX_GROWTH = 1e6;

export class SpectralBasis {
	readonly rates: Float64Array;
	/** Column-major: vectors[a·n + i] is species i of mode a. */
	readonly vectors: Float64Array;
	/** Row-major: inverse[a·n + i]. */
	readonly inverse: Float64Array;
	/** differences[d·n + a] = mode a of V⁻¹(e_to − e_from), for a direction d that stays within its block. */
	readonly differences: Float64Array;
	/** 1 for such a direction. */
	readonly withinBlock: Uint8Array;
	private readonly order: number[];
	private readonly place: number[];
	private readonly blocks: [number, number][];
	private readonly k: Float64Array;
	private readonly basis: Float64Array;
	private readonly basisInverse: Float64Array;
	private readonly t: Float64Array;
	private readonly x: Float64Array;
	private readonly xInverse: Float64Array;
	/** One for each block of several species. */
	private readonly balanced: (BalancedBlock | null)[];
	private readonly lambda: Float64Array;

	constructor(
		readonly n: number,
		private readonly directions: Direction[]
	) {
		const groups = flowOrder(n, directions);
		this.order = groups.flat();
		this.place = new Array<number>(n);
		this.order.forEach((species, position) => (this.place[species] = position));
		let from = 0;
		this.blocks = groups.map((group) => {
			const block: [number, number] = [from, from + group.length];
			from += group.length;
			return block;
		});
		const square = () => new Float64Array(n * n);
		this.k = square();
		this.basis = square();
		this.basisInverse = square();
		this.t = square();
		this.x = square();
		this.xInverse = square();
		this.vectors = square();
		this.inverse = square();
		this.rates = new Float64Array(n);
		this.lambda = new Float64Array(n);
		this.balanced = groups.map((group) => (group.length > 1 ? new BalancedBlock(group, directions) : null));
		this.differences = new Float64Array(directions.length * n);
		this.withinBlock = new Uint8Array(directions.length);
		for (const block of this.balanced)
			for (const { direction } of block?.inner ?? []) this.withinBlock[direction] = 1;
	}

	/** Decomposes K for these constants (one per direction, > 0, 1/s). False: use another way for this set. */
	decompose(constants: Float64Array): boolean {
		this.assemble(constants);
		this.basis.fill(0);
		this.basisInverse.fill(0);
		for (let b = 0; b < this.blocks.length; b++) {
			const [from, to] = this.blocks[b];
			if (!this.turnBlock(from, to, this.balanced[b], constants)) return false;
		}
		this.couple();
		if (!this.triangularVectors()) return false;
		this.combine();
		return true;
	}

	private assemble(constants: Float64Array): void {
		const { n, k, place } = this;
		k.fill(0);
		for (let d = 0; d < this.directions.length; d++) {
			const { from, products } = this.directions[d];
			const column = place[from];
			const rate = constants[d];
			k[column * n + column] -= rate;
			for (let q = 0; q < products.length; q++)
				k[place[products[q].to] * n + column] += rate * products[q].coefficient;
		}
	}

	/** Rates, basis and inverse of one block. */
	private turnBlock(from: number, to: number, block: BalancedBlock | null, constants: Float64Array): boolean {
		const { n, k, basis, basisInverse, lambda } = this;
		if (!block) {
			lambda[from] = k[from * n + from];
			basis[from * n + from] = basisInverse[from * n + from] = 1;
			return true;
		}
		if (!block.turn(constants)) return false;
		for (let i = from; i < to; i++) {
			const w = Math.exp(block.weight[i - from]);
			for (let a = from; a < to; a++) {
				const u = block.vector(a - from, i - from);
				basis[i * n + a] = u * w;
				basisInverse[a * n + i] = u / w;
			}
		}
		for (let a = from; a < to; a++) lambda[a] = block.rates[a - from];
		return true;
	}

	/** Off-diagonal blocks of T = basis⁻¹ K basis. */
	private couple(): void {
		const { n, k, t, x, basis, basisInverse, blocks, lambda } = this;
		t.fill(0);
		for (let a = 0; a < n; a++) t[a * n + a] = lambda[a];
		for (let row = 1; row < blocks.length; row++) {
			const [r0, r1] = blocks[row];
			for (let column = 0; column < row; column++) {
				const [c0, c1] = blocks[column];
				for (let i = r0; i < r1; i++)
					for (let b = c0; b < c1; b++) {
						let sum = 0;
						for (let j = c0; j < c1; j++) sum += k[i * n + j] * basis[j * n + b];
						x[i * n + b] = sum;
					}
				for (let a = r0; a < r1; a++)
					for (let b = c0; b < c1; b++) {
						let sum = 0;
						for (let i = r0; i < r1; i++) sum += basisInverse[a * n + i] * x[i * n + b];
						t[a * n + b] = sum;
					}
			}
		}
	}

	private triangularVectors(): boolean {
		const { n, t, x, xInverse, lambda } = this;
		x.fill(0);
		xInverse.fill(0);
		let largest = 1;
		for (let j = 0; j < n; j++) {
			x[j * n + j] = 1;
			for (let i = j + 1; i < n; i++) {
				let sum = 0;
				for (let l = j; l < i; l++) sum += t[i * n + l] * x[l * n + j];
				if (sum === 0) continue;
				const value = sum / (lambda[j] - lambda[i]);
				x[i * n + j] = value;
				const size = Math.abs(value);
				if (!(size <= MAX_GROWTH)) return false;
				if (size > largest) largest = size;
			}
		}
		return this.invertTriangle(largest);
	}

	private invertTriangle(largest: number): boolean {
		const { n, x, xInverse } = this;
		let growth = 1;
		for (let j = 0; j < n; j++) {
			xInverse[j * n + j] = 1;
			for (let i = j + 1; i < n; i++) {
				let sum = 0;
				for (let l = j; l < i; l++) sum -= x[i * n + l] * xInverse[l * n + j];
				xInverse[i * n + j] = sum;
				const size = Math.abs(sum);
				if (size > growth) growth = size;
			}
		}
		return growth * largest <= MAX_GROWTH;
	}

	/** V = basis · X and V⁻¹ = X⁻¹ · basis⁻¹, in species order. */
	private combine(): void {
		const { n, basis, basisInverse, x, xInverse, vectors, inverse, order, rates, lambda } = this;
		for (let a = 0; a < n; a++) {
			rates[a] = lambda[a];
			for (let i = 0; i < n; i++) {
				let forward = 0;
				let backward = 0;
				for (let l = 0; l < n; l++) {
					forward += basis[i * n + l] * x[l * n + a];
					backward += xInverse[a * n + l] * basisInverse[l * n + i];
				}
				vectors[a * n + order[i]] = forward;
				inverse[a * n + order[i]] = backward;
			}
		}
		for (let b = 0; b < this.blocks.length; b++) this.combineDifferences(this.balanced[b], this.blocks[b][0]);
	}

	private combineDifferences(block: BalancedBlock | null, first: number): void {
		if (!block) return;
		const { n, xInverse, differences } = this;
		for (let place = 0; place < block.inner.length; place++) {
			const row = block.inner[place].direction * n;
			for (let a = 0; a < n; a++) differences[row + a] = 0;
			for (let l = 0; l < block.m; l++) {
				const value = block.difference(l, place);
				for (let a = first; a < n; a++) differences[row + a] += xInverse[a * n + first + l] * value;
			}
		}
	}
}

/** Strongly connected components in the order of flow, sources first. */
export function flowOrder(n: number, directions: Direction[]): number[][] {
	const successors: number[][] = Array.from({ length: n }, () => []);
	for (const { from, products } of directions) for (const { to } of products) successors[from].push(to);
	return componentsOf(successors).blocks.map((block) => Array.from(block));
}
