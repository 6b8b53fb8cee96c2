/**
 * Curves of one run and their derivatives, for the inner loop of a fit.
 *
 *     c(t) = V e^{Λt} V⁻¹ c₀
 *     ∂c/∂ln k_d = k_d ∫₀ᵗ e^{K(t−u)} (Σ ν_i e_i − e_j) c_j(u) du = V z,  z_a = w_a Σ_b φ_ab V_jb y_b
 * with y = V⁻¹c₀, w = k_d V⁻¹(Σ ν_i e_i − e_j) (within a reversible block from the differences of its modes, which lose nothing
 * where the step is fast and nearly at rest) and φ_ab = (e^{λ_a t} − e^{λ_b t})/(λ_a − λ_b), the divided difference.
 * The inner sums depend on the reactant j alone and are shared by its steps. Where the eigenbasis is poor, or complex,
 * `StepPropagator` answers instead. Both are held to the engine's own `SensitivityWorkspace` in the tests.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | φ | `phi` |
 * | V_jb y_b | `reach` (one row per reactant j) |
 * | Σ_b φ_ab V_jb y_b | `inner` |
 *
 * Sources: Daleckii & Krein (1965); Van Loan, IEEE Trans. Autom. Control 23 (1978) 395; McCurdy, Ng & Parlett, Math. Comp.
 * 43 (1984) 501 (divided differences of the exponential).
 */
import type { Watch } from './cancelled';
import { SpectralBasis, type Direction } from './spectral';
import { StepPropagator } from './step-propagator';

/** Largest error in c(0), relative, that the eigenbasis may show. */
const CONSISTENCY = 1e-11;

export class RunKernel {
	/** curves[k·n + i]. */
	readonly curves: Float64Array;
	/** rateDerivatives[(p·times + k)·n + i]: ∂c/∂ln k of `rates[p]`. */
	readonly rateDerivatives: Float64Array;
	/** chargeDerivatives[(p·times + k)·n + i]: ∂c/∂c₀ of `charges[p]`. */
	readonly chargeDerivatives: Float64Array;
	/** slopes[k·n + i] = dc/dt; filled only where asked for. */
	readonly slopes: Float64Array;
	private readonly basis: SpectralBasis;
	private readonly y: Float64Array;
	private readonly e: Float64Array;
	private readonly phi: Float64Array;
	private readonly inner: Float64Array;
	private readonly reach: Float64Array;
	private readonly w: Float64Array;
	private readonly reactants: number[];
	private readonly reactantOf: number[];
	private steps: StepPropagator | null = null;

	/**
	 * @param n species
	 * @param directions every step direction that carries flow
	 * @param times how many times (their values are given to `evaluate`)
	 * @param rates directions to differentiate by
	 * @param charges species to whose charge to differentiate
	 */
	constructor(
		readonly n: number,
		private readonly directions: Direction[],
		readonly times: number,
		private readonly rates: number[],
		private readonly charges: number[],
		private readonly wantSlopes: boolean
	) {
		this.curves = new Float64Array(times * n);
		this.rateDerivatives = new Float64Array(rates.length * times * n);
		this.chargeDerivatives = new Float64Array(charges.length * times * n);
		this.slopes = new Float64Array(wantSlopes ? times * n : 0);
		this.basis = new SpectralBasis(n, directions);
		this.reactants = [...new Set(rates.map((d) => directions[d].from))];
		this.reactantOf = rates.map((d) => this.reactants.indexOf(directions[d].from));
		this.y = new Float64Array(n);
		this.e = new Float64Array(n);
		this.phi = new Float64Array(n * n);
		this.inner = new Float64Array(this.reactants.length * n);
		this.reach = new Float64Array(this.reactants.length * n);
		this.w = new Float64Array(rates.length * n);
	}

	/**
	 * Fills the arrays at ascending times.
	 * @param watch called between times where an evaluation can take long
	 * @returns false where no way gives finite numbers
	 */
	evaluate(
		constants: Float64Array,
		charge: Float64Array,
		timesS: Float64Array,
		watch: Watch | null = null
	): boolean {
		if (this.basis.decompose(constants) && this.project(constants, charge)) {
			for (let k = 0; k < this.times; k++) this.atTime(k, timesS[k]);
		} else {
			this.steps ??= new StepPropagator(this.n, this.directions, this.rates, this.charges);
			if (!this.steps.run(constants, charge, timesS, this, watch)) return false;
		}
		if (this.wantSlopes) this.fillSlopes(constants);
		return true;
	}

	/** y and w; false where V V⁻¹ c₀ misses c₀. */
	private project(constants: Float64Array, charge: Float64Array): boolean {
		const { n, basis, y, w, rates, directions } = this;
		const { inverse } = basis;
		for (let a = 0; a < n; a++) {
			let sum = 0;
			for (let i = 0; i < n; i++) sum += inverse[a * n + i] * charge[i];
			y[a] = sum;
		}
		for (let p = 0; p < rates.length; p++) {
			const { from, products } = directions[rates[p]];
			const k = constants[rates[p]];
			const within = basis.withinBlock[rates[p]] === 1 && products.length === 1;
			for (let a = 0; a < n; a++) {
				if (within) {
					w[p * n + a] = k * basis.differences[rates[p] * n + a];
					continue;
				}
				let sum = -inverse[a * n + from];
				for (let q = 0; q < products.length; q++)
					sum += products[q].coefficient * inverse[a * n + products[q].to];
				w[p * n + a] = k * sum;
			}
		}
		for (let r = 0; r < this.reactants.length; r++)
			for (let b = 0; b < n; b++) this.reach[r * n + b] = basis.vectors[b * n + this.reactants[r]] * y[b];
		return this.consistent(charge);
	}

	private consistent(charge: Float64Array): boolean {
		const { n, basis, y } = this;
		let total = 0;
		let worst = 0;
		for (let i = 0; i < n; i++) {
			let sum = -charge[i];
			for (let a = 0; a < n; a++) sum += basis.vectors[a * n + i] * y[a];
			worst = Math.max(worst, Math.abs(sum));
			total += Math.abs(charge[i]);
		}
		return worst <= CONSISTENCY * total;
	}

	private atTime(k: number, t: number): void {
		const { n, basis, e, phi, y, curves } = this;
		const { rates, vectors } = basis;
		for (let a = 0; a < n; a++) e[a] = Math.exp(rates[a] * t);
		for (let i = 0; i < n; i++) {
			let sum = 0;
			for (let a = 0; a < n; a++) sum += vectors[a * n + i] * e[a] * y[a];
			curves[k * n + i] = sum;
		}
		if (this.rates.length > 0) {
			for (let a = 0; a < n; a++) {
				phi[a * n + a] = t * e[a];
				for (let b = 0; b < a; b++) {
					const gap = rates[a] - rates[b];
					const x = gap * t;
					const value =
						x === 0 ? t * e[b] : x < 0.05 && x > -0.05 ? (e[b] * Math.expm1(x)) / gap : (e[a] - e[b]) / gap;
					phi[a * n + b] = phi[b * n + a] = value;
				}
			}
			this.rateDerivativesAt(k);
		}
		if (this.charges.length > 0) this.chargeDerivativesAt(k);
	}

	private rateDerivativesAt(k: number): void {
		const { n, phi, reach, inner, w, times, rateDerivatives: out, reactants, reactantOf } = this;
		const { vectors } = this.basis;
		for (let r = 0; r < reactants.length; r++) {
			for (let a = 0; a < n; a++) {
				let sum = 0;
				for (let b = 0; b < n; b++) sum += phi[a * n + b] * reach[r * n + b];
				inner[r * n + a] = sum;
			}
		}
		for (let p = 0; p < reactantOf.length; p++) {
			const row = reactantOf[p] * n;
			const target = (p * times + k) * n;
			for (let i = 0; i < n; i++) out[target + i] = 0;
			for (let a = 0; a < n; a++) {
				const z = w[p * n + a] * inner[row + a];
				for (let i = 0; i < n; i++) out[target + i] += vectors[a * n + i] * z;
			}
		}
	}

	private chargeDerivativesAt(k: number): void {
		const { n, e, times, charges, chargeDerivatives: out } = this;
		const { vectors, inverse } = this.basis;
		for (let p = 0; p < charges.length; p++) {
			const target = (p * times + k) * n;
			for (let i = 0; i < n; i++) {
				let sum = 0;
				for (let a = 0; a < n; a++) sum += vectors[a * n + i] * e[a] * inverse[a * n + charges[p]];
				out[target + i] = sum;
			}
		}
	}

	private fillSlopes(constants: Float64Array): void {
		const { n, times, curves, slopes, directions } = this;
		slopes.fill(0);
		for (let d = 0; d < directions.length; d++) {
			const { from, products } = directions[d];
			for (let k = 0; k < times; k++) {
				const flow = constants[d] * curves[k * n + from];
				slopes[k * n + from] -= flow;
				for (let q = 0; q < products.length; q++)
					slopes[k * n + products[q].to] += flow * products[q].coefficient;
			}
		}
	}
}
