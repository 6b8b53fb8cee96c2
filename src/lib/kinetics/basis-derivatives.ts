/**
 * Curves and derivatives by divided differences in a good eigenbasis: first way of `sensitivity.ts`.
 *
 *     s(t) = X z,  z_a = u_a Σ_b φ_ab X_jb y_b,   u = k Y (Σ ν_i e_i − e_j),  y = Y c₀
 *
 * with φ the divided differences of e^{λt}; the sums over b are shared by all steps of one reactant j. Across a reversible pair u
 * comes from the differences that the Jacobi rotations give, so that a fast equilibrium watched for long loses nothing.
 *
 * | symbol | name here |
 * | --- | --- |
 * | X, Y, λ | `Eigenbasis.x`, `.y`, `.lambda` |
 * | φ | `PairTable` |
 * | u | `weightRe`, `weightIm` |
 * | Σ_b φ_ab X_jb y_b | `innerRe`, `innerIm`, one row a reactant |
 *
 * Sources: Ju. L. Daleckii and S. G. Krein, AMS Transl. 47 (1965) 1; N. J. Higham, Functions of Matrices, SIAM 2008, ch. 10.
 */
import { fillPairs, pairTable, type PairTable } from './divided-differences';
import type { Eigenbasis } from './eigenbasis';
import { flowOf, type StepFlow } from './fed-system';
import type { SensitivityParameter, SensitivityResult } from './sensitivity';
import type { LinearSystem } from './types';

interface ComplexVector {
	re: Float64Array;
	im: Float64Array;
}

export class BasisDerivatives {
	private readonly curves: Float64Array;
	private readonly derivatives: Float64Array;
	private readonly pairs: PairTable;
	private readonly startRe: Float64Array;
	private readonly startIm: Float64Array;
	private readonly weightRe: Float64Array;
	private readonly weightIm: Float64Array;
	private readonly innerRe: Float64Array;
	private readonly innerIm: Float64Array;

	/** Writes into the arrays of `result`. */
	constructor(
		private readonly n: number,
		private readonly timesS: Float64Array,
		private readonly parameters: readonly SensitivityParameter[],
		result: SensitivityResult
	) {
		this.curves = result.curves;
		this.derivatives = result.derivatives;
		this.pairs = pairTable(n);
		this.startRe = new Float64Array(n);
		this.startIm = new Float64Array(n);
		this.weightRe = new Float64Array(parameters.length * n);
		this.weightIm = new Float64Array(parameters.length * n);
		this.innerRe = new Float64Array(n * n);
		this.innerIm = new Float64Array(n * n);
	}

	/** Fills the arrays. */
	evaluate(basis: Eigenbasis, system: LinearSystem, charge: ArrayLike<number>): void {
		const { n, timesS, startRe, startIm } = this;
		startRe.fill(0);
		startIm.fill(0);
		for (let a = 0; a < n; a++)
			for (let s = 0; s < n; s++) {
				startRe[a] += basis.y.re[a * n + s] * charge[s];
				startIm[a] += basis.y.im[a * n + s] * charge[s];
			}
		const reactants = this.weights(basis, system);
		for (let k = 0; k < timesS.length; k++) {
			fillPairs(this.pairs, basis.lambda.re, basis.lambda.im, timesS[k]);
			this.curveAt(basis, k);
			for (const reactant of new Set(reactants)) if (reactant >= 0) this.innerSums(basis, reactant);
			for (let p = 0; p < reactants.length; p++) this.derivativeAt(basis, p, reactants[p], k);
		}
	}

	/** u of each parameter; returns its reactant, −1 for a charge, −2 for a step that carries nothing. */
	private weights(basis: Eigenbasis, system: LinearSystem): Int32Array {
		const { n, weightRe, weightIm } = this;
		weightRe.fill(0);
		weightIm.fill(0);
		return Int32Array.from(this.parameters, (parameter, p) => {
			const u = { re: weightRe.subarray(p * n, (p + 1) * n), im: weightIm.subarray(p * n, (p + 1) * n) };
			if (parameter.kind === 'charge') {
				this.addColumn(basis, parameter.species, 1, u);
				return -1;
			}
			const flow = flowOf(system, parameter);
			if (!flow) return -2;
			if (!this.addPair(basis, flow, u)) {
				this.addColumn(basis, flow.from, -flow.rate, u);
				for (const product of flow.products) this.addColumn(basis, product.to, product.rate, u);
			}
			return flow.from;
		});
	}

	/** u += amount · Y e_species */
	private addColumn({ y }: Eigenbasis, species: number, amount: number, u: ComplexVector): void {
		const { n } = this;
		for (let a = 0; a < n; a++) {
			u.re[a] += y.re[a * n + species] * amount;
			u.im[a] += y.im[a * n + species] * amount;
		}
	}

	/** u = k Y (e_to − e_from) = k Z⁻¹ W (e_to − e_from) for a step within a component in detailed balance. */
	private addPair({ zInverse, space }: Eigenbasis, flow: StepFlow, u: ComplexVector): boolean {
		const { n } = this;
		if (flow.products.length !== 1 || flow.products[0].rate !== flow.rate) return false;
		const pair = space.pairDifferences.get(flow.from * n + flow.products[0].to);
		if (!pair) return false;
		for (let a = 0; a < n; a++)
			for (let b = 0; b < pair.values.length; b++) {
				const at = a * n + pair.first + b;
				u.re[a] += zInverse.re[at] * pair.values[b] * flow.rate;
				u.im[a] += zInverse.im[at] * pair.values[b] * flow.rate;
			}
		return true;
	}

	private curveAt({ x }: Eigenbasis, k: number): void {
		const { n, curves, startRe, startIm, pairs } = this;
		for (let s = 0; s < n; s++) {
			let sum = 0;
			for (let a = 0; a < n; a++) {
				const re = startRe[a] * pairs.expRe[a] - startIm[a] * pairs.expIm[a];
				const im = startRe[a] * pairs.expIm[a] + startIm[a] * pairs.expRe[a];
				sum += x.re[s * n + a] * re - x.im[s * n + a] * im;
			}
			curves[k * n + s] = sum;
		}
	}

	/** inner[j][a] = Σ_b φ_ab X_jb y_b for reactant j. */
	private innerSums({ x }: Eigenbasis, reactant: number): void {
		const { n, pairs, startRe, startIm, innerRe, innerIm } = this;
		const row = reactant * n;
		for (let a = 0; a < n; a++) {
			let re = 0;
			let im = 0;
			for (let b = 0; b < n; b++) {
				const vRe = x.re[row + b] * startRe[b] - x.im[row + b] * startIm[b];
				const vIm = x.re[row + b] * startIm[b] + x.im[row + b] * startRe[b];
				re += pairs.re[a * n + b] * vRe - pairs.im[a * n + b] * vIm;
				im += pairs.re[a * n + b] * vIm + pairs.im[a * n + b] * vRe;
			}
			innerRe[row + a] = re;
			innerIm[row + a] = im;
		}
	}

	private derivativeAt({ x }: Eigenbasis, p: number, reactant: number, k: number): void {
		const { n, derivatives, weightRe, weightIm, innerRe, innerIm, pairs } = this;
		const out = (p * this.timesS.length + k) * n;
		const timeRe = reactant < 0 ? pairs.expRe : innerRe;
		const timeIm = reactant < 0 ? pairs.expIm : innerIm;
		const row = Math.max(reactant, 0) * n;
		for (let s = 0; s < n; s++) {
			let sum = 0;
			for (let a = 0; a < n; a++) {
				const uRe = weightRe[p * n + a];
				const uIm = weightIm[p * n + a];
				const zRe = uRe * timeRe[row + a] - uIm * timeIm[row + a];
				const zIm = uRe * timeIm[row + a] + uIm * timeRe[row + a];
				sum += x.re[s * n + a] * zRe - x.im[s * n + a] * zIm;
			}
			derivatives[out + s] = sum;
		}
	}
}
