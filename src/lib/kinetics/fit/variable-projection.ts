/**
 * Variable projection: a fit whose linear parameters are found by linear least squares at every point of the search.
 *
 *     r(θ) = Φ(θ) â(θ) − y,  â = argmin ‖Φ a − y‖;   min over θ of ‖r(θ)‖² has the θ, and â, of the full problem
 *     Φ = Q [R; 0]:  residuals and derivatives are kept as the last m − L rows of Qᵀ r and of Qᵀ (∂Φ/∂θ_j â)
 *
 * This is Kaufman's Jacobian P⊥ (∂Φ/∂θ_j) â: the part of the full one that lies along Φ⁺ᵀ (∂Φ/∂θ_j)ᵀ r is left out, which is of second order
 * in the residuals and changes neither the gradient nor the minimum. Lengths and angles are those of the projected
 * vectors, so that the search needs no others. Where every prediction is proportional to one linear parameter, one evaluation of the
 * model gives Φ and the derivatives at â; otherwise a second one is made there.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | θ, a | `nonlinear`, `linear` (positions in x) |
 * | Φ, R, Qᵀ | `phi` (factored in place), `diagonal` |
 *
 * Sources: Golub & Pereyra, SIAM J. Numer. Anal. 10 (1973) 413; Kaufman, BIT 15 (1975) 49; Golub & Pereyra, Inverse Problems 19
 * (2003) R1.
 */
import { proportionalTo } from './elimination';
import { backSubstitute, extractR, pivotedQr, reflect } from './linear-algebra';
import type { LeastSquaresProblem } from './least-squares';
import type { KineticModel } from './model';
import type { Bounds } from './slope';

export class ProjectedModel implements LeastSquaresProblem {
	readonly m: number;
	readonly p: number;
	/** Evaluations of the model underneath. */
	evaluations = 0;
	readonly nonlinear: number[];
	/** Full parameters of the last evaluation, linear ones at their best. */
	readonly x: Float64Array;
	private readonly r: Float64Array;
	private readonly j: Float64Array;
	private readonly phi: Float64Array;
	private readonly b: Float64Array;
	private readonly upper: Float64Array;
	private readonly diagonal: Float64Array;
	private readonly pivot: Int32Array;
	private readonly norms: Float64Array;
	private readonly delta: Float64Array;
	private readonly ratio: Float64Array;
	private readonly proportional: Int32Array | null;

	constructor(
		private readonly model: KineticModel,
		private readonly linear: number[]
	) {
		const l = linear.length;
		this.m = model.m - l;
		this.nonlinear = Array.from({ length: model.p }, (_, j) => j).filter((j) => !linear.includes(j));
		this.p = this.nonlinear.length;
		this.x = new Float64Array(model.p);
		this.r = new Float64Array(model.m);
		this.j = new Float64Array(model.m * model.p);
		this.phi = new Float64Array(model.m * l);
		this.b = new Float64Array(model.m);
		this.upper = new Float64Array(l * l);
		this.diagonal = new Float64Array(l);
		this.pivot = new Int32Array(l);
		this.norms = new Float64Array(2 * l);
		this.delta = new Float64Array(l);
		this.ratio = new Float64Array(model.p);
		this.proportional = proportionalTo(model.problem, linear);
	}

	/** Where the linear parameters begin: their scale is all that matters. */
	begin(start: ArrayLike<number>): Float64Array {
		this.x.set(start);
		for (const j of this.linear) if (!this.isLn(j) && !(this.x[j] > 0)) this.x[j] = 1;
		return Float64Array.from(this.nonlinear, (j) => start[j]);
	}

	evaluate(theta: Float64Array, residuals: Float64Array, jacobian: Float64Array): boolean {
		const { model, x, r, j } = this;
		this.nonlinear.forEach((place, k) => (x[place] = theta[k]));
		this.evaluations++;
		if (!model.evaluate(x, r, j) || !this.factor() || !this.solve()) return false;
		if (this.proportional) this.rescale(this.proportional);
		else {
			this.evaluations++;
			if (!model.evaluate(x, r, j)) return false;
		}
		this.project(residuals, jacobian);
		return true;
	}

	/** Whether a linear parameter of the last evaluation lies at or beyond a bound. */
	linearOutside({ lower, upper }: Bounds): boolean {
		return this.linear.some((j) => !(this.x[j] > lower[j] && this.x[j] < upper[j]));
	}

	get watch(): LeastSquaresProblem['watch'] {
		return this.model.watch;
	}

	private isLn(j: number): boolean {
		return this.model.problem.free[j].scale === 'ln';
	}

	/** Φ from the columns of the linear parameters, factored; false where they do not determine all of them. */
	private factor(): boolean {
		const { model, linear, phi, b, r, j, x, diagonal } = this;
		const { m } = model;
		linear.forEach((place, k) => {
			// ∂/∂ln f = f ∂/∂f.
			const scale = this.isLn(place) ? Math.exp(-x[place]) : 1;
			for (let i = 0; i < m; i++) phi[k * m + i] = scale * j[place * m + i];
		});
		for (let i = 0; i < m; i++) b[i] = -r[i];
		pivotedQr(phi, m, linear.length, b, diagonal, this.pivot, this.norms, model.watch);
		const last = Math.abs(diagonal[linear.length - 1]);
		return last > 1e-12 * Math.abs(diagonal[0]);
	}

	/** Moves the linear parameters to their best; false for a response factor that would not be positive. */
	private solve(): boolean {
		const { model, linear, phi, b, diagonal, upper, delta, pivot, x, ratio } = this;
		const l = linear.length;
		extractR(phi, model.m, l, diagonal, upper);
		backSubstitute(upper, l, l, b, delta);
		for (let k = 0; k < l; k++) {
			const place = linear[pivot[k]];
			const before = this.isLn(place) ? Math.exp(x[place]) : x[place];
			const after = before + delta[k];
			if (!Number.isFinite(after) || (this.isLn(place) && !(after > 0)) || after === 0) return false;
			ratio[place] = after / before;
			x[place] = this.isLn(place) ? Math.log(after) : after;
		}
		return true;
	}

	/** Predictions and derivatives follow their one linear parameter in proportion. */
	private rescale(proportional: Int32Array): void {
		const { model, r, j, ratio } = this;
		const { m, points } = model;
		for (let i = 0; i < m; i++) {
			const s = proportional[i] < 0 ? 1 : ratio[proportional[i]];
			r[i] = s * r[i] + ((s - 1) * points[i].observed) / points[i].sigma;
			for (const place of this.nonlinear) j[place * m + i] *= s;
		}
	}

	private project(residuals: Float64Array, jacobian: Float64Array): void {
		const { model, linear, phi, r, j } = this;
		const { m } = model;
		const l = linear.length;
		for (let k = 0; k < l; k++) reflect(phi, m, k, r, 0);
		residuals.set(r.subarray(l));
		this.nonlinear.forEach((place, column) => {
			for (let k = 0; k < l; k++) reflect(phi, m, k, j, place * m);
			jacobian.set(j.subarray(place * m + l, (place + 1) * m), column * this.m);
		});
	}
}
