/**
 * Residuals and Jacobian of a compiled fit: r_i = (prediction_i − observed_i)/σ_i.
 *
 * A limit ("below 0.002") gives a residual only when the prediction lies beyond it, else zero with a zero row: one-sided
 * least squares, the limit's own contribution to the misfit.
 *
 *     ∂(f S)/∂x_j = f (Σ_d A_dj ∂S/∂ln k_d + Σ_i A_ij ∂S/∂c₀ᵢ + A_τj dS/dt + A_fj S)
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | S | `signal`, the weighted sum of species |
 * | A | the `terms` of each affine function |
 */
import { evaluateLinear } from './affine';
import type { Watch } from './cancelled';
import type { ChannelModel } from './channels';
import type { LeastSquaresProblem } from './least-squares';
import type { Point } from './points';
import type { KineticProblem } from './problem';
import type { RunModel } from './run-model';
import { ProgramKernel } from './program-kernel';
import { RunKernel } from './run-kernel';

interface RunState {
	model: RunModel;
	kernel: RunKernel | ProgramKernel;
	constants: Float64Array;
	charge: Float64Array;
	times: Float64Array;
	/** Directions (parameters, under a temperature log) and species whose derivatives the kernel gives, in its order. */
	rates: number[];
	charges: number[];
	/** Species that no area-% channel of the run sees: they share the total with response factor one. */
	unassayed: number[];
}

/** Points between two questions whether to go on: 2ⁿ − 1. */
const POINTS_UNWATCHED = 511;

/** Whether the areas of a channel make part of the total that area % refers to. */
const inTotal = (channel: ChannelModel): boolean => channel.areaPercent && !channel.besideTotal;

/** Evaluates one compiled problem; holds all storage, so that `evaluate` allocates nothing. */
export class KineticModel implements LeastSquaresProblem {
	readonly m: number;
	readonly p: number;
	/** Predictions in the channels' units, in the order of the points. */
	readonly predictions: Float64Array;
	/** Asked before every run, and inside the long ones; throws to stop the evaluation. */
	watch: Watch | null = null;
	private readonly states: RunState[];
	private readonly gradient: Float64Array;
	private readonly total: Float64Array;

	constructor(
		readonly problem: KineticProblem,
		/** Other points than the problem's own: for bands and for runs that the fit did not use. */
		readonly points: Point[] = problem.points
	) {
		this.m = points.length;
		this.p = problem.free.length;
		this.predictions = new Float64Array(this.m);
		this.gradient = new Float64Array(this.p);
		this.total = new Float64Array(this.p);
		this.states = problem.runs.map((run) => prepare(run, problem));
	}

	evaluate(x: Float64Array, residuals: Float64Array, jacobian: Float64Array): boolean {
		const { m, p, points, gradient, predictions } = this;
		for (const state of this.states) if (!this.solveRun(state, x)) return false;
		for (let i = 0; i < m; i++) {
			if ((i & POINTS_UNWATCHED) === 0) this.watch?.();
			const point = points[i];
			const prediction = this.predict(point, x);
			predictions[i] = prediction;
			const gap = prediction - point.observed;
			const silent = (point.kind === 'below' && gap <= 0) || (point.kind === 'above' && gap >= 0);
			residuals[i] = silent ? 0 : gap / point.sigma;
			for (let j = 0; j < p; j++) jacobian[j * m + i] = silent ? 0 : gradient[j] / point.sigma;
		}
		return true;
	}

	/** Predictions and their derivatives (column-major, unweighted) at x, whatever was observed. */
	evaluatePredictions(x: Float64Array, out: Float64Array, jacobian: Float64Array): boolean {
		const { m, p, points, gradient } = this;
		for (const state of this.states) if (!this.solveRun(state, x)) return false;
		for (let i = 0; i < m; i++) {
			if ((i & POINTS_UNWATCHED) === 0) this.watch?.();
			out[i] = this.predict(points[i], x);
			for (let j = 0; j < p; j++) jacobian[j * m + i] = gradient[j];
		}
		return true;
	}

	private solveRun(state: RunState, x: Float64Array): boolean {
		this.watch?.();
		const { model, constants, charge, times } = state;
		for (let d = 0; d < constants.length; d++) {
			const lnk = evaluateLinear(model.lnRates[d], x);
			if (!(lnk < 690)) return false;
			constants[d] = Math.exp(Math.max(lnk, -690));
		}
		for (let i = 0; i < charge.length; i++) charge[i] = evaluateLinear(model.charge[i], x);
		const shift = evaluateLinear(model.offset, x);
		for (let k = 0; k < times.length; k++) times[k] = Math.max(0, model.timesS[k] + shift);
		if (state.kernel instanceof ProgramKernel) return state.kernel.evaluate(x, charge, times, this.watch);
		return state.kernel.evaluate(constants, charge, times, this.watch);
	}

	/** The prediction of a point; its derivatives go to `gradient`. */
	private predict(point: Point, x: Float64Array): number {
		const state = this.states[point.run];
		const { gradient, p } = this;
		const channel = state.model.channels[point.channel];
		const value = this.signal(state, point.channel, point.time, x);
		if (!channel.areaPercent) return value;
		const own = this.total;
		own.set(gradient);
		let sum = value;
		if (channel.besideTotal) {
			gradient.fill(0);
			sum = 0;
		}
		for (let c = 0; c < state.model.channels.length; c++)
			if (c !== point.channel && inTotal(state.model.channels[c])) {
				sum += this.signal(state, c, point.time, x, false);
			}
		for (let q = 0; q < state.unassayed.length; q++)
			sum += this.addSpecies(state, state.unassayed[q], 1, point.time);
		if (!(sum > 0)) {
			gradient.fill(0);
			return 0;
		}
		// `gradient` now holds the derivative of the total, `own` that of this channel.
		for (let j = 0; j < p; j++) gradient[j] = (100 * (own[j] - (value / sum) * gradient[j])) / sum;
		return (100 * value) / sum;
	}

	/** f·S of a channel; adds its derivatives to `gradient` (cleared first unless told not to). */
	private signal(state: RunState, c: number, k: number, x: Float64Array, clear = true): number {
		const { gradient } = this;
		if (clear) gradient.fill(0);
		const channel = state.model.channels[c];
		const response = channel.lnResponse;
		const f =
			response.constant === 0 && response.terms.length === 0 ? 1 : Math.exp(evaluateLinear(response, x));
		let sum = 0;
		for (let q = 0; q < channel.species.length; q++)
			sum += this.addSpecies(state, channel.species[q], f * channel.weights[q], k);
		for (let q = 0; q < response.terms.length; q++)
			gradient[response.terms[q].free] += response.terms[q].coefficient * sum;
		return sum;
	}

	/** weight·c_i at time k, and its derivatives added to `gradient`. */
	private addSpecies(state: RunState, i: number, weight: number, k: number): number {
		const { gradient } = this;
		const { kernel, model, rates, charges } = state;
		const n = model.charge.length;
		const times = model.timesS.length;
		for (let r = 0; r < rates.length; r++) {
			const derivative = weight * kernel.rateDerivatives[(r * times + k) * n + i];
			if (kernel instanceof ProgramKernel) {
				gradient[rates[r]] += derivative;
				continue;
			}
			const terms = model.lnRates[rates[r]].terms;
			for (let q = 0; q < terms.length; q++) gradient[terms[q].free] += terms[q].coefficient * derivative;
		}
		for (let s = 0; s < charges.length; s++) {
			const derivative = weight * kernel.chargeDerivatives[(s * times + k) * n + i];
			const terms = model.charge[charges[s]].terms;
			for (let q = 0; q < terms.length; q++) gradient[terms[q].free] += terms[q].coefficient * derivative;
		}
		const shift = model.offset.terms;
		if (shift.length > 0 && state.times[k] > 0) {
			const derivative = weight * kernel.slopes[k * n + i];
			for (let q = 0; q < shift.length; q++) gradient[shift[q].free] += shift[q].coefficient * derivative;
		}
		return weight * kernel.curves[k * n + i];
	}
}

/** A model of another problem that is stopped as the first one is. */
export function watched(problem: KineticProblem, like: KineticModel): KineticModel {
	const model = new KineticModel(problem);
	model.watch = like.watch;
	return model;
}

function prepare(model: RunModel, problem: KineticProblem): RunState {
	const n = problem.species.length;
	const program = model.log !== null;
	const rates = program
		? [...new Set(model.rateForms.flatMap((f) => [...f.base.terms, ...f.energy.terms].map((t) => t.free)))]
		: model.lnRates.map((_, d) => d).filter((d) => model.lnRates[d].terms.length > 0);
	const charges = model.charge.map((_, i) => i).filter((i) => model.charge[i].terms.length > 0);
	const seen = new Set(model.channels.filter(inTotal).flatMap((c) => Array.from(c.species)));
	const times = model.timesS.length;
	const wantSlopes = model.offset.terms.length > 0;
	return {
		model,
		kernel: program
			? new ProgramKernel(model, problem.network.referenceTemperatureK, n, rates, charges)
			: new RunKernel(n, model.directions, times, rates, charges, wantSlopes),
		constants: new Float64Array(model.directions.length),
		charge: new Float64Array(n),
		times: new Float64Array(times),
		rates,
		charges,
		unassayed: model.charge.map((_, i) => i).filter((i) => !seen.has(i))
	};
}
