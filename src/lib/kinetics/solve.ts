/**
 * The closed-form solution of one batch under constant conditions, and the choice among ways of evaluating it.
 *
 *     dc/dt = K c,  c(0) = charge   →   c(t) = Σ_j a_j(t) e^{λ_j t}
 *
 * 1. The structure of K gives the modes (`mode-space.ts`, `mode-groups.ts`, `triangular-modes.ts`) and with them the closed
 *    form (`closed-form.ts`), fast to evaluate, with a running bound on its own rounding.
 * 2. Where that bound alone keeps the error below 1e-13 of the total charge, it is used as it is. Otherwise it is compared, at
 *    times spread over every mode, with the independent non-negative evaluation (`propagator.ts`), whose error is some 1e-14
 *    whatever the scheme; only agreement lets it stand, else the non-negative evaluation draws the curves
 *    (`method: 'uniformisation'`). If the two differ by more than both their bounds, extended precision decides
 *    (`method: 'extended'`).
 * 3. Even then, a concentration that is small beside the terms it is made of (early times: c ∝ t⁴ four steps down a chain) is
 *    evaluated by the non-negative way, so that trace amounts keep their *relative* accuracy.
 *
 * t = 0 returns the charge itself; nothing is negative, NaN or infinite for a non-negative charge and bounded schemes.
 *
 * | symbol | name here |
 * | --- | --- |
 * | A[s][l], φ_l | `form.amplitudes`, `basis()` |
 * | bound on Σ|terms| of a species | `size[s]` |
 */
import { blockWeights, type BlockWeights } from './block-weights';
import { basis, basisSlope, closedForm, type ClosedForm } from './closed-form';
import { components, type Components } from './components';
import { earlyCurves, fastestOutflow, isEarly } from './early-series';
import { curvesOnGrid, gridStep, type Grid } from './grid';
import { finalComposition } from './final-composition';
import { modeGroups } from './mode-groups';
import { modeSpace } from './mode-space';
import { modesOf } from './modes';
import { Propagator } from './propagator';
import { withIntegrals } from './linear-system';
import { Scratch } from './scratch';
import { triangularModes } from './triangular-modes';
import type { LinearSystem, Mode, Solution, SolveMethod } from './types';
import { judge, type Judgement } from './verdict';

/**
 * Solves dc/dt = K c for one charge.
 * @param system flows of the network, 1/s
 * @param charge c(0), mol/L, length n
 * @throws RangeError when the charge has the wrong length or is not finite, or products multiply round a loop without limit.
 */
export function solve(system: LinearSystem, charge: ArrayLike<number>): Solution {
	return new NetworkSolution(system, checkedCharge(system, charge));
}

function checkedCharge(system: LinearSystem, charge: ArrayLike<number>): Float64Array {
	if (charge.length !== system.n)
		throw new RangeError(`The charge has ${charge.length} values for ${system.n} species.`);
	const own = new Float64Array(charge);
	for (let i = 0; i < own.length; i++)
		if (!Number.isFinite(own[i]))
			throw new RangeError(`The charge of species ${i + 1} is not a finite number.`);
	return own;
}

/** Runs of at least this many times are worth the matrix of one step. */
const LONG_RUN = 24;

// Needed while a closed form is made, not after.
const spaceMemory = new Scratch();
const modeMemory = new Scratch();

class NetworkSolution implements Solution {
	readonly n: number;
	readonly method: SolveMethod;
	readonly errorEstimate: number;
	readonly form: ClosedForm;
	private readonly verdict: Judgement;
	private readonly parts: Components;
	private readonly balance: BlockWeights;
	private readonly fastest: number;
	private readonly phi: Float64Array;
	private readonly work: Float64Array;
	private propagator: Propagator | null = null;
	private integrator: Propagator | null = null;
	private finalValue: Float64Array | null = null;
	private modeList: Mode[] | null = null;

	constructor(
		private readonly system: LinearSystem,
		readonly charge: Float64Array
	) {
		this.n = system.n;
		this.fastest = fastestOutflow(system);
		this.parts = components(system);
		this.balance = blockWeights(system, this.parts);
		const space = modeSpace(system, this.parts, this.balance, spaceMemory);
		const { groups, groupOf } = modeGroups(space);
		this.form = closedForm(space, groups, triangularModes(space, groups, groupOf, charge, modeMemory));
		this.phi = new Float64Array(this.form.width);
		this.work = new Float64Array(Math.max(this.form.width, this.n));
		this.verdict = judge(system, charge, space, groups, this.form, () => this.exact());
		this.method = this.verdict.method;
		this.errorEstimate = this.verdict.errorEstimate;
	}

	get final(): Float64Array {
		return (this.finalValue ??= finalComposition(this.system, this.charge, this.parts, this.balance).final);
	}

	get modes(): Mode[] {
		return (this.modeList ??= modesOf(this.form));
	}

	at(timeS: number, out: Float64Array = new Float64Array(this.n)): Float64Array {
		this.write(timeS, out, 0);
		return out;
	}

	curves(
		timesS: ArrayLike<number>,
		out: Float64Array = new Float64Array(this.n * timesS.length)
	): Float64Array {
		const stepS = gridStep(timesS);
		if (stepS === 0) {
			for (let k = 0; k < timesS.length; k++) this.write(timesS[k], out, k * this.n);
			return out;
		}
		const grid = { firstS: timesS[0], stepS, count: timesS.length };
		if (!this.verdict.useClosedForm) this.exact().applyGrid(grid, this.charge, out);
		else if (this.form.simple) this.repair(grid, curvesOnGrid(this.form, grid, this.verdict, out), out);
		else this.repair(grid, this.closedForms(timesS, out), out);
		if (grid.firstS === 0) out.set(this.charge);
		return out;
	}

	slope(timeS: number, out: Float64Array = new Float64Array(this.n)): Float64Array {
		checkTime(timeS);
		if (timeS === Infinity) return out.fill(0);
		if (this.verdict.useClosedForm && this.closedFormHolds(timeS)) return this.closedSlope(out);
		const c = this.at(timeS);
		const { outflow, transfers } = this.system;
		for (let i = 0; i < this.n; i++) out[i] = -outflow[i] * c[i];
		for (const { from, to, rate, coefficient } of transfers) out[to] += rate * coefficient * c[from];
		return out;
	}

	integral(timeS: number, out: Float64Array = new Float64Array(this.n)): Float64Array {
		checkTime(timeS);
		if (timeS === Infinity) {
			out.set(finalComposition(this.system, this.charge, this.parts, this.balance).throughput);
			return out;
		}
		this.integrator ??= new Propagator(withIntegrals(this.system));
		const both = new Float64Array(2 * this.n);
		both.set(this.charge);
		this.integrator.apply(timeS, both, both);
		out.set(both.subarray(this.n));
		return out;
	}

	private exact(): Propagator {
		return (this.propagator ??= new Propagator(this.system, this.parts, this.balance));
	}

	private write(timeS: number, out: Float64Array, start: number): void {
		checkTime(timeS);
		if (timeS === 0) out.set(this.charge, start);
		else if (timeS === Infinity) out.set(this.final, start);
		else if (!this.verdict.useClosedForm || !this.closedForm(timeS, out, start)) {
			const target = out.subarray(start, start + this.n);
			this.exact().apply(timeS, this.charge, target);
		}
	}

	/** Closed form at every time; returns the indices at which it is not to be trusted. */
	private closedForms(timesS: ArrayLike<number>, out: Float64Array): number[] {
		const unsure: number[] = [];
		for (let k = 0; k < timesS.length; k++) if (!this.closedForm(timesS[k], out, k * this.n)) unsure.push(k);
		return unsure;
	}

	/** Evaluates the given indices of a grid by the non-negative way, long runs of them as a grid of their own. */
	private repair({ firstS, stepS }: Grid, unsure: number[], out: Float64Array): void {
		const { n } = this;
		for (let i = 0; i < unsure.length;) {
			let end = i + 1;
			while (end < unsure.length && unsure[end] === unsure[end - 1] + 1) end++;
			const run = { firstS: firstS + unsure[i] * stepS, stepS, count: end - i };
			const target = out.subarray(unsure[i] * n, (unsure[i] + run.count) * n);
			const lastS = run.firstS + (run.count - 1) * stepS;
			if (isEarly(this.fastest, lastS)) earlyCurves(this.system, this.fastest, this.charge, run, target);
			else if (run.count >= LONG_RUN) this.exact().applyGrid(run, this.charge, target);
			else
				for (let k = 0; k < run.count; k++)
					this.exact().apply(run.firstS + k * stepS, this.charge, target.subarray(k * n, (k + 1) * n));
			i = end;
		}
	}

	/** Closed form into out; false when some species needs the non-negative evaluation. */
	private closedForm(timeS: number, out: Float64Array, start: number): boolean {
		const { n, form, phi } = this;
		const { width, amplitudes } = form;
		const { trusted } = this.verdict;
		basis(form, timeS, phi);
		let sure = true;
		for (let s = 0, at = 0; s < n; s++) {
			let sum = 0;
			for (let l = 0; l < width; l++, at++) sum += amplitudes[at] * phi[l];
			out[start + s] = sum;
			if (!(Math.abs(sum) >= trusted[s])) sure = false;
		}
		return sure || this.allDecayed(out, start);
	}

	/** Second look at small values: fine where the terms themselves have decayed as much. */
	private allDecayed(out: Float64Array, start: number): boolean {
		const { n, form, phi } = this;
		const { trusted, exactAmplitudes, smallest } = this.verdict;
		for (let s = 0; s < n; s++) {
			const value = Math.abs(out[start + s]);
			if (value >= trusted[s]) continue;
			if (!exactAmplitudes) return false;
			let size = 0;
			for (let l = 0, at = s * form.width; l < form.width; l++, at++)
				size += form.sizes[at] * Math.abs(phi[l]);
			if (!(value >= smallest * size)) return false;
		}
		return true;
	}

	private closedFormHolds(timeS: number): boolean {
		return timeS > 0 && this.closedForm(timeS, this.work, 0);
	}

	private closedSlope(out: Float64Array): Float64Array {
		const { form, phi, work, n } = this;
		basisSlope(form, phi, work);
		for (let s = 0, at = 0; s < n; s++) {
			let sum = 0;
			for (let l = 0; l < form.width; l++, at++) sum += form.amplitudes[at] * work[l];
			out[s] = sum;
		}
		return out;
	}
}

function checkTime(timeS: number): void {
	if (!(timeS >= 0)) throw new RangeError(`A time ≥ 0 s is expected; found ${timeS} s.`);
}
