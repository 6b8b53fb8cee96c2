/**
 * How far a run is from an acceptance criterion, over time: the curve whose sign changes are the times that count.
 *
 *     g(t, θ) = Σ w_i c_i(t, θ) + Σ v_j c_j(0, θ) + u          the criterion holds where g ≤ 0
 *
 * w and the part without w come from `criteria.ts`. That part is affine in the charge (a limit of "1 % of charge" moves with
 * the charge), so v_j is its exact difference quotient, and the uncertainty of a fitted charge counts in full.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | w, v, u | `now`, `start`, `rest` |
 */
import type { CriterionContent } from '../../schemas/criterion';
import type { FitReport } from '../../schemas/fit';
import type { RunContent } from '../../schemas/run';
import { CriterionError, toCriterion, type Criterion } from '../criteria';
import { toNetwork } from '../from-scheme';
import { areaFactors } from './area-factors';
import { CurveOfSpecies, type Curve } from './decision-curve';
import { KineticModel } from './model';
import { probeModel } from './probe';
import type { RestoredFit } from './restore';
import { speciesProblem } from './species-curves';

/** Amounts of every species at some times, mol/L: `values[k·n + i]`, and the derivatives of each. */
interface Composition {
	values: Float64Array;
	row: (time: number, species: number) => Float64Array;
}

export class CurveOfCriterion extends CurveOfSpecies {
	private readonly now: Float64Array;
	private readonly start: Float64Array;
	private readonly rest: number;
	/** "C NMT 3 % of charge" */
	readonly text: string;
	readonly criterion: Criterion;
	/** What a limit in area % takes as response factors; null for other limits. */
	readonly note: string | null;

	/** @throws RangeError where the criterion cannot be applied to this scheme and charge */
	constructor(fitted: RestoredFit, report: FitReport, run: RunContent, content: CriterionContent) {
		super(fitted, report, run, content.species, { kind: 'level', level: 0 });
		const n = fitted.problem.species.length;
		const charge = this.composition(fitted.x, [0]).values;
		const { network } = toNetwork(fitted.problem.request);
		const { factors: responseFactors, note } = areaFactors(content, run, report);
		this.note = note;
		const at = (c: ArrayLike<number>): Criterion =>
			toCriterion(content, { network, charge: c, responseFactors });
		try {
			this.criterion = at(charge);
		} catch (caught) {
			if (caught instanceof CriterionError) throw new RangeError(caught.message, { cause: caught });
			throw caught;
		}
		const { weights, constant, text } = this.criterion;
		this.text = text;
		this.now = Float64Array.from(weights);
		const step = Math.max(...charge) || 1;
		this.start = Float64Array.from({ length: n }, (_, j) => {
			const more = charge.slice();
			more[j] += step;
			return (at(more).constant - constant) / step;
		});
		this.rest = constant - this.start.reduce((sum, v, j) => sum + v * charge[j], 0);
	}

	/** Whether the criterion holds in the charge. */
	get holdsAtStart(): boolean {
		return this.curve(this.fitted.x, [0]).values[0] <= 0;
	}

	/** The limited quantity in its own unit at a time. */
	valueAt(time: number): number {
		const { values } = this.composition(this.fitted.x, [0, time]);
		return this.criterion.value(values.subarray(this.now.length));
	}

	protected override curve(x: Float64Array, times: number[]): Curve {
		const { now, start } = this;
		const { values, row } = this.composition(x, [0, ...times]);
		const n = now.length;
		const at = (k: number, weights: Float64Array) =>
			weights.reduce((sum, w, i) => sum + w * values[k * n + i], 0);
		const charged = at(0, start) + this.rest;
		const rows = times.map((_, k) => {
			const gradient = new Float64Array(x.length);
			for (let i = 0; i < n; i++) {
				const late = row(k + 1, i);
				const early = row(0, i);
				for (let j = 0; j < x.length; j++) gradient[j] += now[i] * late[j] + start[i] * early[j];
			}
			return gradient;
		});
		return { values: Float64Array.from(times, (_, k) => at(k + 1, now) + charged), rows };
	}

	private composition(x: Float64Array, times: number[]): Composition {
		const { problem, at } = probeModel(this.fitted.problem.request, this.run, times, this.known);
		const run = problem.runs[at];
		const dense = speciesProblem(problem, () => run.timesS);
		const n = problem.species.length;
		const model = new KineticModel(dense, dense.runs[at].points);
		const out = new Float64Array(model.m);
		const jacobian = new Float64Array(model.m * model.p);
		if (!model.evaluatePredictions(x, out, jacobian))
			throw new RangeError('The curves of this run cannot be computed at these constants.');
		const place = times.map((t) => run.timesS.indexOf(t * run.timeFactor));
		return {
			values: Float64Array.from(
				{ length: n * times.length },
				(_, k) => out[place[Math.floor(k / n)] * n + (k % n)]
			),
			row: (time, species) =>
				Float64Array.from({ length: model.p }, (_, j) => jacobian[j * model.m + place[time] * n + species])
		};
	}
}
