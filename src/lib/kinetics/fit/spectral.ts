/**
 * Eigenbasis of a first-order rate matrix for the inner loop of a fit: same topology, new constants, nothing allocated.
 *
 * Problem: K = V Λ V⁻¹ for thousands of sets of constants. Strongly connected components, taken in the order of flow, make K
 * block lower triangular. A block of one species has its eigenvalue on the diagonal; a block whose constants obey detailed
 * balance is similar to a symmetric matrix, S = D⁻¹ K D with Dᵢ² = πᵢ, and is turned by Jacobi rotations. In the basis of the
 * blocks K becomes a triangular T with the eigenvalues on its diagonal, whose eigenvectors follow by substitution:
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
 * Sources: Tarjan, SIAM J. Comput. 1 (1972) 146; Wei & Prater, Adv. Catal. 13 (1962) 203 (symmetry by detailed balance);
 * Golub & Van Loan, Matrix Computations, 8.5 (Jacobi) and 7.6 (triangular eigenvectors).
 */
import { componentsOf } from '../components';

export interface Direction {
	/** Index of the species consumed. */
	from: number;
	products: { to: number; coefficient: number }[];
}

/** Growth of V·V⁻¹ beyond which the basis costs too many digits. */
const MAX_GROWTH = 1e6;

export class SpectralBasis {
	readonly rates: Float64Array;
	/** Column-major: vectors[a·n + i] is species i of mode a. */
	readonly vectors: Float64Array;
	/** Row-major: inverse[a·n + i]. */
	readonly inverse: Float64Array;
	private readonly order: number[];
	private readonly place: number[];
	private readonly blocks: [number, number][];
	private readonly k: Float64Array;
	private readonly basis: Float64Array;
	private readonly basisInverse: Float64Array;
	private readonly t: Float64Array;
	private readonly x: Float64Array;
	private readonly xInverse: Float64Array;
	private readonly weight: Float64Array;
	private readonly known: Uint8Array;
	private readonly queue: Int32Array;
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
		this.weight = new Float64Array(n);
		this.known = new Uint8Array(n);
		this.queue = new Int32Array(n);
	}

	/** Decomposes K for these constants (one per direction, > 0, 1/s). False: use another way for this set. */
	decompose(constants: Float64Array): boolean {
		this.assemble(constants);
		this.basis.fill(0);
		this.basisInverse.fill(0);
		for (const [from, to] of this.blocks) if (!this.turnBlock(from, to)) return false;
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

	private turnBlock(from: number, to: number): boolean {
		const { n, k, basis, basisInverse, lambda } = this;
		if (to - from === 1) {
			lambda[from] = k[from * n + from];
			basis[from * n + from] = basisInverse[from * n + from] = 1;
			return true;
		}
		if (!this.balanceWeights(from, to)) return false;
		this.symmetrise(from, to);
		this.jacobi(from, to);
		for (let i = from; i < to; i++) {
			const w = Math.exp(this.weight[i]);
			for (let a = from; a < to; a++) {
				const q = this.x[i * n + a];
				basis[i * n + a] = q * w;
				basisInverse[a * n + i] = q / w;
			}
		}
		for (let a = from; a < to; a++) lambda[a] = this.t[a * n + a];
		return true;
	}

	/** ½ ln π along a spanning tree of the block, then a check of detailed balance on every pair. */
	private balanceWeights(from: number, to: number): boolean {
		const { n, k, weight, known, queue } = this;
		known.fill(0, from, to);
		weight[from] = 0;
		known[from] = 1;
		queue[0] = from;
		let size = 1;
		for (let head = 0; head < size; head++) {
			const j = queue[head];
			for (let i = from; i < to; i++) {
				if (known[i] || !(k[i * n + j] > 0 && k[j * n + i] > 0)) continue;
				weight[i] = weight[j] + 0.5 * Math.log(k[i * n + j] / k[j * n + i]);
				known[i] = 1;
				queue[size++] = i;
			}
		}
		if (size < to - from) return false;
		for (let i = from; i < to; i++)
			for (let j = from; j < i; j++) {
				const there = k[i * n + j];
				const back = k[j * n + i];
				if (there === 0 && back === 0) continue;
				if (!(there > 0 && back > 0)) return false;
				const broken = weight[i] - weight[j] - 0.5 * Math.log(there / back);
				if (Math.abs(broken) > 1e-13 * (1 + Math.abs(weight[i]) + Math.abs(weight[j]))) return false;
			}
		return true;
	}

	/** S into `t`, the identity into `x`, for the block. */
	private symmetrise(from: number, to: number): void {
		const { n, k, t, x } = this;
		for (let i = from; i < to; i++) {
			for (let j = from; j < to; j++) x[i * n + j] = i === j ? 1 : 0;
			t[i * n + i] = k[i * n + i];
			for (let j = from; j < i; j++) t[i * n + j] = t[j * n + i] = Math.sqrt(k[i * n + j] * k[j * n + i]);
		}
	}

	private jacobi(from: number, to: number): void {
		const { n, t } = this;
		for (let sweep = 0; sweep < 40; sweep++) {
			let turned = false;
			for (let p = from; p < to - 1; p++)
				for (let q = p + 1; q < to; q++) {
					const off = Math.abs(t[p * n + q]);
					if (off === 0 || off <= 1e-17 * Math.sqrt(Math.abs(t[p * n + p] * t[q * n + q]))) continue;
					this.rotate(from, to, p, q);
					turned = true;
				}
			if (!turned) return;
		}
	}

	private rotate(from: number, to: number, p: number, q: number): void {
		const { n, t, x } = this;
		const off = t[p * n + q];
		const theta = (t[q * n + q] - t[p * n + p]) / (2 * off);
		const tangent = (theta < 0 ? -1 : 1) / (Math.abs(theta) + Math.sqrt(1 + theta * theta));
		const c = 1 / Math.sqrt(1 + tangent * tangent);
		const s = tangent * c;
		t[p * n + p] -= tangent * off;
		t[q * n + q] += tangent * off;
		t[p * n + q] = t[q * n + p] = 0;
		for (let i = from; i < to; i++) {
			if (i !== p && i !== q) {
				const a = t[i * n + p];
				const b = t[i * n + q];
				t[i * n + p] = t[p * n + i] = c * a - s * b;
				t[i * n + q] = t[q * n + i] = s * a + c * b;
			}
			const a = x[i * n + p];
			const b = x[i * n + q];
			x[i * n + p] = c * a - s * b;
			x[i * n + q] = s * a + c * b;
		}
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
	}
}

/** Strongly connected components in the order of flow, sources first. */
export function flowOrder(n: number, directions: Direction[]): number[][] {
	const successors: number[][] = Array.from({ length: n }, () => []);
	for (const { from, products } of directions) for (const { to } of products) successors[from].push(to);
	return componentsOf(successors).blocks.map((block) => Array.from(block));
}
