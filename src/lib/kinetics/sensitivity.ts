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
 * | s | `derivatives` |
 * | first way, second way | `basis-derivatives.ts`, `fed-derivatives.ts` |
 *
 * Sources: Ju. L. Daleckii and S. G. Krein, AMS Transl. 47 (1965) 1; C. F. Van Loan, IEEE Trans. Autom. Control 23 (1978) 395;
 * N. J. Higham, Functions of Matrices, SIAM 2008, ch. 10.
 */
import { BasisDerivatives } from './basis-derivatives';
import { eigenbasis } from './eigenbasis';
import { FedDerivatives } from './fed-derivatives';
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
	private readonly basisWay: BasisDerivatives;
	private readonly fedWay: FedDerivatives;

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
		this.basisWay = new BasisDerivatives(n, timesS, parameters, this);
		this.fedWay = new FedDerivatives(n, timesS, parameters, this);
	}

	/** Fills `curves` and `derivatives`. A parameter whose constant is zero or absent has derivative 0. */
	evaluate(system: LinearSystem, charge: ArrayLike<number>): this {
		const basis = eigenbasis(system);
		if (basis) this.basisWay.evaluate(basis, system, charge);
		if (basis && (!basis.general || this.agrees(system, charge))) this.method = 'divided differences';
		else {
			this.method = 'block matrix';
			this.fedWay.evaluate(system, charge);
		}
		return this;
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
