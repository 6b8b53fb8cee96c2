/**
 * Curves and their analytic derivatives: with respect to ln k of any step-direction, and to any initial amount.
 *
 * The derivative s = ∂c/∂ln k of a step-direction j → Σ ν_i i with constant k obeys
 *
 *     ds/dt = K s + k (Σ ν_i e_i − e_j) c_j(t),  s(0) = 0
 *
 * 1. Where K = X Λ Y with a good basis (Daleckii and Krein):
 *        s(t) = X z,  z_a = u_a Σ_b φ_ab X_jb y_b,   u = k Y (Σ ν_i e_i − e_j),  y = Y c₀,
 *    with φ the divided differences of e^{λt}; the sums over b are shared by all steps of one reactant. Across a reversible
 *    pair u comes from the differences that the Jacobi rotations give (a pre-equilibrium watched for long: k t = 1e10).
 * 2. Elsewhere (equal or nearly equal coupled rates, ill-conditioned bases): the system beside a copy of itself that is fed by
 *    c_j — Van Loan's block triangular matrix — evaluated by the non-negative propagator, once fed by the products and once by
 *    the reactant; the derivative is their difference. No cancellation but that one.
 * The derivative with respect to c₀_j is column j of e^{Kt}.
 *
 * | symbol | name here |
 * | --- | --- |
 * | X, Y, Λ | `Eigenbasis.x`, `.y`, `.lambda` |
 * | φ | `PairTable` |
 * | u | `weightRe`, `weightIm` |
 *
 * Sources: Ju. L. Daleckii and S. G. Krein, AMS Transl. 47 (1965) 1; C. F. Van Loan, IEEE Trans. Autom. Control 23 (1978) 395;
 * N. J. Higham, Functions of Matrices, SIAM 2008, ch. 10.
 */
import { fillPairs, pairTable, type PairTable } from './divided-differences';
import { eigenbasis, type Eigenbasis } from './eigenbasis';
import { fedPropagator, flowOf, type StepFlow } from './fed-system';
import { Propagator } from './propagator';
import type { LinearSystem } from './types';

export type SensitivityParameter =
	{ kind: 'rate'; step: number; direction: 'forward' | 'reverse' } | { kind: 'charge'; species: number };

export interface SensitivityResult {
	/** c, times-major: curves[k·n + i] is species i at timesS[k], mol/L. */
	curves: Float64Array;
	/**
	 * derivatives[(p·times + k)·n + i]: of species i at timesS[k] with respect to parameter p.
	 * For a rate: dc/d ln k, mol/L. For a charge: dc/dc₀, dimensionless.
	 */
	derivatives: Float64Array;
}

/** Agreement with the non-negative evaluation, of the total charge, that a basis without relative accuracy must show. */
const AGREEMENT = 1e-12;

/**
 * Curves and derivatives for one linear system, charge and list of times. Keep one workspace per (times, parameters) and call
 * `evaluate` for each new set of constants: the arrays of the result are the workspace's own and are overwritten by the next
 * call. Nothing is allocated per time.
 */
export class SensitivityWorkspace implements SensitivityResult {
	readonly curves: Float64Array;
	readonly derivatives: Float64Array;
	/** Which way the last call took. */
	method: 'divided differences' | 'block matrix' = 'block matrix';
	private readonly pairs: PairTable;
	private readonly startRe: Float64Array;
	private readonly startIm: Float64Array;
	private readonly weightRe: Float64Array;
	private readonly weightIm: Float64Array;
	private readonly innerRe: Float64Array;
	private readonly innerIm: Float64Array;

	/**
	 * @param n number of species
	 * @param timesS times ≥ 0 in s, any order
	 * @param parameters what to differentiate by, in the order of the result
	 */
	constructor(
		readonly n: number,
		readonly timesS: Float64Array,
		readonly parameters: readonly SensitivityParameter[]
	) {
		this.curves = new Float64Array(timesS.length * n);
		this.derivatives = new Float64Array(parameters.length * timesS.length * n);
		this.pairs = pairTable(n);
		this.startRe = new Float64Array(n);
		this.startIm = new Float64Array(n);
		this.weightRe = new Float64Array(parameters.length * n);
		this.weightIm = new Float64Array(parameters.length * n);
		this.innerRe = new Float64Array(n * n);
		this.innerIm = new Float64Array(n * n);
	}

	/** Fills `curves` and `derivatives`. A parameter whose constant is zero or absent has derivative 0. */
	evaluate(system: LinearSystem, charge: ArrayLike<number>): this {
		const basis = eigenbasis(system);
		if (basis && this.byBasis(basis, system, charge)) this.method = 'divided differences';
		else {
			this.method = 'block matrix';
			this.byBlockMatrix(system, charge);
		}
		return this;
	}

	private byBasis(basis: Eigenbasis, system: LinearSystem, charge: ArrayLike<number>): boolean {
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
		return !basis.general || this.agrees(system, charge);
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

	/** Compares the latest and a middle time with the non-negative evaluation. */
	private agrees(system: LinearSystem, charge: ArrayLike<number>): boolean {
		const { n, timesS, curves } = this;
		if (timesS.length === 0) return true;
		const exact = new Propagator(system);
		let total = 0;
		for (let i = 0; i < n; i++) total += Math.abs(charge[i]);
		let latest = 0;
		for (let k = 1; k < timesS.length; k++) if (timesS[k] > timesS[latest]) latest = k;
		for (const k of [latest, timesS.length >> 1]) {
			const truth = exact.apply(timesS[k], charge);
			for (let i = 0; i < n; i++)
				if (!(Math.abs(truth[i] - curves[k * n + i]) <= AGREEMENT * total)) return false;
		}
		return true;
	}

	private byBlockMatrix(system: LinearSystem, charge: ArrayLike<number>): void {
		const { n, timesS, curves, derivatives } = this;
		const plain = new Propagator(system);
		const times = timesS.length;
		for (let k = 0; k < times; k++) plain.apply(timesS[k], charge, curves.subarray(k * n, (k + 1) * n));
		this.parameters.forEach((parameter, p) => {
			if (parameter.kind === 'rate') return this.parameterByFeeding(system, charge, p);
			const unit = new Float64Array(n);
			unit[parameter.species] = 1;
			for (let k = 0, at = p * times * n; k < times; k++, at += n)
				plain.apply(timesS[k], unit, derivatives.subarray(at, at + n));
		});
	}

	private parameterByFeeding(system: LinearSystem, charge: ArrayLike<number>, p: number): void {
		const parameter = this.parameters[p];
		const length = this.timesS.length * this.n;
		const out = this.derivatives.subarray(p * length, (p + 1) * length);
		if (parameter.kind === 'rate') this.fedDerivative(system, charge, flowOf(system, parameter), out);
	}

	private fedDerivative(
		system: LinearSystem,
		charge: ArrayLike<number>,
		flow: StepFlow | null,
		out: Float64Array
	): void {
		const { n, timesS } = this;
		out.fill(0);
		if (!flow) return;
		const gain = fedPropagator(system, flow.from, flow.products);
		const loss = fedPropagator(system, flow.from, [{ to: flow.from, rate: flow.rate }]);
		const start = new Float64Array(2 * n);
		for (let i = 0; i < n; i++) start[i] = charge[i];
		const end = new Float64Array(2 * n);
		for (let k = 0; k < timesS.length; k++) {
			gain.apply(timesS[k], start, end);
			for (let i = 0; i < n; i++) out[k * n + i] = end[n + i];
			loss.apply(timesS[k], start, end);
			for (let i = 0; i < n; i++) out[k * n + i] -= end[n + i];
		}
	}
}

interface ComplexVector {
	re: Float64Array;
	im: Float64Array;
}

/** Curves and derivatives once; see `SensitivityWorkspace` for shapes and for repeated use. */
export function sensitivities(
	system: LinearSystem,
	charge: ArrayLike<number>,
	timesS: ArrayLike<number>,
	parameters: readonly SensitivityParameter[]
): SensitivityResult {
	return new SensitivityWorkspace(system.n, Float64Array.from(timesS), parameters).evaluate(system, charge);
}
