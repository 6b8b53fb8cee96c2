/**
 * Curves and derivatives of a run whose temperature was logged, for the inner loop of a fit.
 *
 * The log is a chain of ramps, cut into pieces of at most 0.75 K. Each piece is one fourth-order commutator-free Magnus step of
 * two exponentials, c ← e^{hK(k̃₂)} e^{hK(k̃₁)} c, with k̃₁ = α₁k(T₁) + α₂k(T₂), k̃₂ = α₂k(T₁) + α₁k(T₂) at the two Gauss points;
 * derivatives are carried along by
 *     s ← E s + Σ_d (∂E c/∂ ln k̃_d) ∂ ln k̃_d/∂x.
 * The engine's `programs.ts` (error-controlled step length) is the measure that the tests hold this to.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | E, ∂E c/∂ ln k̃ | `stage.chargeDerivatives`, `stage.rateDerivatives` |
 * | s | `sensitivity`, one row per parameter, then one per charge |
 *
 * Sources: Blanes & Moan, Appl. Numer. Math. 56 (2006) 1519; Alvermann & Fehske, J. Comput. Phys. 230 (2011) 5930.
 */
import { evaluateLinear, type Linear } from './affine';
import type { Watch } from './cancelled';
import type { RunModel } from './run-model';
import { GAS_CONSTANT, inverseTemperatureGap } from '../rate-laws';
import { RunKernel } from './run-kernel';
import { TemperatureChain } from './temperature-chain';

const ALPHA_1 = 0.25 + Math.sqrt(3) / 6;
const ALPHA_2 = 0.25 - Math.sqrt(3) / 6;
const GAUSS = Math.sqrt(3) / 6;

export class ProgramKernel {
	readonly curves: Float64Array;
	/** rateDerivatives[(r·times + k)·n + i]: with respect to the estimated parameter `parameters[r]`. */
	readonly rateDerivatives: Float64Array;
	readonly chargeDerivatives: Float64Array;
	readonly slopes: Float64Array;
	private readonly stage: RunKernel;
	private readonly chain: TemperatureChain;
	private readonly lnBase: Float64Array;
	private readonly energy: Float64Array;
	private readonly k1: Float64Array;
	private readonly k2: Float64Array;
	private readonly mixed: Float64Array;
	private readonly c: Float64Array;
	private readonly next: Float64Array;
	private readonly sensitivity: Float64Array;
	private readonly step = new Float64Array(1);
	/** coefficient of parameter r in ln k of direction d: base[d·q + r] − gap/R · slope[d·q + r]. */
	private readonly baseCoefficients: Float64Array;
	private readonly energyCoefficients: Float64Array;

	constructor(
		private readonly model: RunModel,
		private readonly referenceK: number,
		private readonly n: number,
		private readonly parameters: number[],
		private readonly charges: number[]
	) {
		const times = model.timesS.length;
		const directions = model.directions.length;
		const q = parameters.length;
		this.curves = new Float64Array(times * n);
		this.rateDerivatives = new Float64Array(q * times * n);
		this.chargeDerivatives = new Float64Array(charges.length * times * n);
		this.slopes = new Float64Array(times * n);
		const all = (length: number) => Array.from({ length }, (_, i) => i);
		this.stage = new RunKernel(n, model.directions, 1, all(directions), all(n), false);
		this.chain = new TemperatureChain(model.log!);
		this.lnBase = new Float64Array(directions);
		this.energy = new Float64Array(directions);
		this.k1 = new Float64Array(directions);
		this.k2 = new Float64Array(directions);
		this.mixed = new Float64Array(directions);
		this.c = new Float64Array(n);
		this.next = new Float64Array(n);
		this.sensitivity = new Float64Array((q + charges.length) * n);
		this.baseCoefficients = new Float64Array(directions * q);
		this.energyCoefficients = new Float64Array(directions * q);
		model.rateForms.forEach(({ base, energy }, d) => {
			this.fillCoefficients(this.baseCoefficients, base, d);
			this.fillCoefficients(this.energyCoefficients, energy, d);
		});
	}

	private fillCoefficients(out: Float64Array, linear: Linear, d: number): void {
		for (const { free, coefficient } of linear.terms)
			out[d * this.parameters.length + this.parameters.indexOf(free)] += coefficient;
	}

	/** Fills the arrays at ascending times (s, clock of the log). @returns false where a constant overflows. */
	evaluate(x: Float64Array, charge: Float64Array, timesS: Float64Array, watch: Watch | null = null): boolean {
		const { model, c, sensitivity, n, parameters, charges } = this;
		for (let d = 0; d < this.lnBase.length; d++) {
			this.lnBase[d] = evaluateLinear(model.rateForms[d].base, x);
			this.energy[d] = evaluateLinear(model.rateForms[d].energy, x);
		}
		c.set(charge);
		sensitivity.fill(0);
		charges.forEach((species, q) => (sensitivity[(parameters.length + q) * n + species] = 1));
		let t = 0;
		for (let k = 0; k < timesS.length; k++) {
			while (t < timesS[k]) {
				watch?.();
				const end = Math.min(timesS[k], this.chain.pieceEnd(t));
				if (!this.advance(t, end - t)) return false;
				t = end;
			}
			this.record(k, timesS[k]);
		}
		return true;
	}

	/** Fills constants at a temperature and returns (1/T − 1/T_ref)/R. */
	private constants(temperatureK: number, out: Float64Array): number {
		const gap = inverseTemperatureGap(temperatureK, this.referenceK) / GAS_CONSTANT;
		const eyring = Math.log(temperatureK / this.referenceK);
		for (let d = 0; d < out.length; d++) {
			const ln = this.lnBase[d] - this.energy[d] * gap + (this.model.rateForms[d].eyring ? eyring : 0);
			out[d] = Math.exp(Math.min(ln, 700));
		}
		return gap;
	}

	private advance(t: number, h: number): boolean {
		const early = this.chain.at(t + (0.5 - GAUSS) * h);
		const late = this.chain.at(t + (0.5 + GAUSS) * h);
		const gap1 = this.constants(early, this.k1);
		const gap2 = this.constants(late, this.k2);
		if (early === late) return this.exponential(h, 1, 0, gap1, gap2);
		// A stage takes half of the piece's weight: α₁ + α₂ = ½.
		return (
			this.exponential(h, ALPHA_1, ALPHA_2, gap1, gap2) && this.exponential(h, ALPHA_2, ALPHA_1, gap1, gap2)
		);
	}

	private exponential(h: number, a: number, b: number, gap1: number, gap2: number): boolean {
		const { mixed, k1, k2, stage, step, c, next, sensitivity, n, parameters } = this;
		for (let d = 0; d < mixed.length; d++) {
			mixed[d] = a * k1[d] + b * k2[d];
			if (!(mixed[d] > 0) || mixed[d] > 1e290) return false;
		}
		step[0] = h;
		if (!stage.evaluate(mixed, c, step)) return false;
		const q = parameters.length;
		const rows = sensitivity.length / n;
		for (let r = 0; r < rows; r++) {
			next.fill(0);
			for (let j = 0; j < n; j++) {
				const s = sensitivity[r * n + j];
				if (s !== 0) for (let i = 0; i < n; i++) next[i] += stage.chargeDerivatives[j * n + i] * s;
			}
			if (r < q)
				for (let d = 0; d < mixed.length; d++) {
					const base = this.baseCoefficients[d * q + r];
					const slope = this.energyCoefficients[d * q + r];
					if (base === 0 && slope === 0) continue;
					const effect = (a * k1[d] * (base - slope * gap1) + b * k2[d] * (base - slope * gap2)) / mixed[d];
					for (let i = 0; i < n; i++) next[i] += stage.rateDerivatives[d * n + i] * effect;
				}
			for (let i = 0; i < n; i++) sensitivity[r * n + i] = next[i];
		}
		for (let i = 0; i < n; i++) c[i] = stage.curves[i];
		return true;
	}

	private record(k: number, t: number): void {
		const { n, c, curves, sensitivity, parameters, charges, slopes, model, k1 } = this;
		const times = model.timesS.length;
		for (let i = 0; i < n; i++) curves[k * n + i] = c[i];
		for (let r = 0; r < parameters.length; r++)
			for (let i = 0; i < n; i++) this.rateDerivatives[(r * times + k) * n + i] = sensitivity[r * n + i];
		for (let r = 0; r < charges.length; r++)
			for (let i = 0; i < n; i++)
				this.chargeDerivatives[(r * times + k) * n + i] = sensitivity[(parameters.length + r) * n + i];
		this.constants(this.chain.at(t), k1);
		slopes.fill(0, k * n, (k + 1) * n);
		for (let d = 0; d < model.directions.length; d++) {
			const { from, products } = model.directions[d];
			const flow = k1[d] * c[from];
			slopes[k * n + from] -= flow;
			for (let p = 0; p < products.length; p++)
				slopes[k * n + products[p].to] += flow * products[p].coefficient;
		}
	}
}
