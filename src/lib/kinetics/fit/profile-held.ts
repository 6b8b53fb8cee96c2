/**
 * A fit with one parameter held at a value: the inner minimisation of every profile.
 *
 * It follows the minimum from the last value held, moved along the covariance. That alone can stay in a local minimum (slow
 * and fast steps exchanged), or where a constant has run so far down or up that ln k has no effect and so no gradient. `others`
 * therefore gives further places to begin: the last point and the estimate with every such parameter brought back into the span
 * that the data can show, both with two steps exchanged (those with the step of the parameter held first), then points of the
 * seeded low-discrepancy sequence of the search itself. All of them are tried for one limit where the problem is of usual size; a
 * large one tries as many as WORK allows, counted in evaluations, so that the same request gives the same digits everywhere.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | SSR(θ) | `ssr` |
 * | dSSR/dθ = 2 J_jᵀ r at a constrained minimum | `slope` |
 *
 * Sources: Bates & Watts (1988) 6.1; several starts for the nuisance parameters of a profile: Raue et al., Bioinformatics 25
 * (2009) 1923, section 3.
 */
import { LeastSquaresWorkspace } from './least-squares';
import { leastSquares } from './levenberg-marquardt';
import type { KineticModel } from './model';
import { FitCancelled } from './search';
import { startingPoints, type SearchBox } from './starts';
import type { Uncertainty } from './uncertainty';

export interface HeldFitInput {
	model: KineticModel;
	box: SearchBox;
	/** The estimates. */
	best: { x: Float64Array; ssr: number };
	uncertainty: Uncertainty;
	cancelled?: () => boolean;
}

/** Evaluations of one inner minimisation; gone on with where they run out. */
const EVALUATIONS = 150;
const CONTINUED = 3;
/** Further starting points of the sequence, and the evaluations that each gets to show that it leads anywhere. */
const OTHER_STARTS = 8;
const TRY_EVALUATIONS = 40;
/** Evaluations × values × parameters that further starting points of one limit may take. */
const WORK = 3e6;
/** First trust radius, as a multiple of the size of the parameters: along a foretold path, and where that led astray. */
const BOLD = 10;
const GENTLE = 0.01;

export class HeldFit {
	evaluations = 0;
	/** The re-optimised parameters of the last minimisation. */
	readonly last: Float64Array;
	/** dSSR/dθ there. */
	slope = NaN;
	private readonly workspace: LeastSquaresWorkspace;
	private readonly lower: Float64Array;
	private readonly upper: Float64Array;
	private readonly sequence: Float64Array[];
	private readonly exchanges: [number, number][][];
	/** Evaluations that further starting points may take for one limit, and what of them is left for the limit at hand. */
	private readonly allowance: number;
	private left: number;

	constructor(private readonly input: HeldFitInput) {
		const { model, box, best } = input;
		this.workspace = new LeastSquaresWorkspace(model.m, model.p);
		this.lower = new Float64Array(model.p);
		this.upper = new Float64Array(model.p);
		this.last = best.x.slice();
		this.sequence = startingPoints(box, OTHER_STARTS + 1, SEED).slice(1);
		this.exchanges = exchangesOf(model.problem.free.map((slot) => slot.id));
		this.allowance = Math.max(2 * TRY_EVALUATIONS, WORK / (model.m * model.p));
		this.left = this.allowance;
	}

	/** Further starting points have their whole allowance again. */
	replenish(): void {
		this.left = this.allowance;
	}

	/**
	 * SSR with parameter j held at a value, from the last point moved along the covariance. Where that ends above `expected`,
	 * also from the last point as it is, in short steps: a long first step may end where nothing has an effect any more.
	 */
	follow(j: number, value: number, previous: number, expected = Infinity): number {
		const origin = this.last.slice();
		const ssr = this.minimise(j, value, this.moved(j, value - previous)) ?? Infinity;
		if (ssr <= expected) return ssr;
		const [x, slope] = [this.last.slice(), this.slope];
		for (const start of [origin, this.inSight(origin)]) {
			const gentle = this.minimise(j, value, start, GENTLE);
			if (gentle !== null && gentle < ssr * (1 - 1e-9)) return gentle;
		}
		this.last.set(x);
		this.slope = slope;
		return ssr;
	}

	private moved(j: number, by: number): Float64Array {
		const { box, uncertainty } = this.input;
		const variance = uncertainty.covariance[j][j];
		return this.last.map((value, k) => {
			const along = variance > 0 ? uncertainty.covariance[k][j] / variance : 0;
			const move = Number.isFinite(along) ? along * by : 0;
			const limit = 0.5 * Math.abs(box.to[k] - box.from[k]);
			return value + Math.min(Math.max(move, -limit), limit);
		});
	}

	/**
	 * Looks for a lower SSR with j held at the value than `below`; true where one is found, which then is the last point.
	 * The last point stays as it is otherwise.
	 */
	findsLower(j: number, value: number, below: number): boolean {
		if (this.input.model.p < 2) return false;
		const kept = this.last.slice();
		const slope = this.slope;
		for (const start of this.others(j)) {
			if (this.left <= 0) break;
			start[j] = value;
			const before = this.evaluations;
			const tried = this.run(j, value, start, {
				ftol: 1e-4,
				xtol: 1e-4,
				maxEvaluations: TRY_EVALUATIONS,
				factor: BOLD
			});
			this.left -= this.evaluations - before;
			if (!(tried.ssr < below)) continue;
			const ssr = this.minimise(j, value, tried.x);
			if (ssr !== null && ssr < below) return true;
		}
		this.last.set(kept);
		this.slope = slope;
		return false;
	}

	/** Whether some parameter stands where the data cannot see it, so that a local search cannot bring it back. */
	outOfSight(x: ArrayLike<number>): boolean {
		const { from, to } = this.input.box;
		for (let k = 0; k < from.length; k++) if (x[k] < from[k] || x[k] > to[k]) return true;
		return false;
	}

	/**
	 * Whether the SSR at the value falls below a limit once the bounds of the search that other parameters have come to are moved out:
	 * then they, and not the data, made it rise. Bounds that a person gave stay, as does zero for a charge.
	 */
	leansOnSearchBounds(j: number, value: number, below: number): boolean {
		const { model, box } = this.input;
		const at = this.last.slice();
		const [lower, upper] = [box.lower.slice(), box.upper.slice()];
		let any = false;
		model.problem.free.forEach((slot, k) => {
			const reach = 1e-6 * (box.upper[k] - box.lower[k]);
			if (k === j || !(reach > 0)) return;
			const down = slot.lower === -Infinity && slot.kind !== 'amount' && at[k] - box.lower[k] <= reach;
			const up = slot.upper === Infinity && box.upper[k] - at[k] <= reach;
			if (down) lower[k] -= 0.5 * (box.upper[k] - box.lower[k]);
			if (up) upper[k] += 0.5 * (box.upper[k] - box.lower[k]);
			any ||= down || up;
		});
		if (!any) return false;
		const start = at.slice();
		start[j] = value;
		const limits = { ftol: 1e-9, xtol: 1e-9, maxEvaluations: EVALUATIONS, factor: GENTLE };
		const { ssr } = this.run(j, value, start, limits, { lower, upper });
		return ssr < below;
	}

	private others(j: number): Float64Array[] {
		const near = [this.inSight(this.last), this.inSight(this.input.best.x)];
		const own = this.exchanges.filter((pairs) => pairs.flat().includes(j));
		const rest = this.exchanges.filter((pairs) => !own.includes(pairs));
		const exchanged = near.flatMap((x) => own.map((pairs) => exchange(x, pairs)));
		const further = near.flatMap((x) => rest.map((pairs) => exchange(x, pairs)));
		return [...near, ...exchanged, ...further, ...this.sequence.map((x) => x.slice())];
	}

	/** Every parameter brought back into the span that the data can show. */
	private inSight(x: Float64Array): Float64Array {
		const { from, to } = this.input.box;
		return x.map((v, k) => Math.min(Math.max(v, from[k]), to[k]));
	}

	/** Null where the model cannot be computed at the start. */
	private minimise(j: number, value: number, start: Float64Array, factor = BOLD): number | null {
		const from = start.slice();
		from[j] = value;
		const limits = { ftol: 1e-11, xtol: 1e-9, maxEvaluations: EVALUATIONS, factor };
		let result = this.run(j, value, from, limits);
		for (let k = 0; k < CONTINUED && result.status === 'evaluations'; k++)
			result = this.run(j, value, result.x, limits);
		if (result.status === 'not finite' || !Number.isFinite(result.ssr)) return null;
		this.last.set(result.x);
		// At a constrained optimum dSSR/dθ is the partial derivative alone.
		this.slope = 2 * this.workspace.gradient[j];
		return result.ssr;
	}

	private run(
		j: number,
		value: number,
		start: Float64Array,
		limits: { ftol: number; xtol: number; maxEvaluations: number; factor: number },
		bounds: Pick<SearchBox, 'lower' | 'upper'> = this.input.box
	) {
		const { model, cancelled } = this.input;
		this.lower.set(bounds.lower);
		this.upper.set(bounds.upper);
		this.lower[j] = this.upper[j] = value;
		const options = { ...limits, lower: this.lower, upper: this.upper, cancelled };
		const result = leastSquares(model, start, options, this.workspace);
		this.evaluations += result.evaluations;
		if (result.status === 'cancelled') throw new FitCancelled();
		return result;
	}
}

/** The point with the constants and energies of two steps exchanged. */
function exchange(x: Float64Array, pairs: [number, number][]): Float64Array {
	const y = x.slice();
	for (const [a, b] of pairs) [y[a], y[b]] = [x[b], x[a]];
	return y;
}

/** Places of the like parameters of every two forward steps: constants with constants, energies with energies. */
function exchangesOf(ids: string[]): [number, number][][] {
	const place = new Map(ids.map((id, k) => [id, k]));
	const steps = ids
		.filter((id) => id.endsWith('.forward.kRef'))
		.map((id) => id.slice(0, -'.forward.kRef'.length));
	return steps.flatMap((a, i) =>
		steps.slice(i + 1).map((b) =>
			['forward.kRef', 'forward.activationEnergy'].flatMap((quantity): [number, number][] => {
				const [first, second] = [place.get(`${a}.${quantity}`), place.get(`${b}.${quantity}`)];
				return first === undefined || second === undefined ? [] : [[first, second]];
			})
		)
	);
}

/** The same points for the same problem, always. */
const SEED = 1;
