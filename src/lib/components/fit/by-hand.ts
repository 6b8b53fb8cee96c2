/**
 * The scheme over measured points while constants are moved by hand: curves and misfit, computed in the page.
 */
import { KineticModel } from '$lib/kinetics/fit/model';
import { probeModel, type Probe } from '$lib/kinetics/fit/probe';
import { compileProblem, type KineticProblem } from '$lib/kinetics/fit/problem';
import { fromReported, toReported, type Slot } from '$lib/kinetics/fit/slots';
import { searchBox, type SearchBox } from '$lib/kinetics/fit/starts';
import type { FitRequest } from '$lib/schemas/fit';
import { curveTimes, lastTimeOf } from './panels';

export interface Handle {
	id: string;
	unit: string;
	scale: 'ln' | 'linear';
	/** Ends of the slider and its start, on the scale of estimation. */
	low: number;
	high: number;
	start: number;
}

export interface HandView {
	/** Square root of the weighted sum of squares over the degrees of freedom; null without any. */
	s: number | null;
	ssr: number;
	/** Curves of each run: channel values at `times`. */
	runs: { id: string; times: number[]; channels: { id: string; values: Float64Array }[] }[];
}

const POINTS = 120;
/** A slider reaches this far to either side of its start: a factor of about 150 for constants. */
const REACH = 5;

const inner = (slot: Slot, reported: number): number => {
	const value = fromReported(slot, reported);
	return slot.scale === 'ln' ? Math.log(value) : value;
};

/** Curves and misfit of one request at any values of its free parameters. */
export class Bench {
	readonly problem: KineticProblem;
	private readonly model: KineticModel;
	private readonly box: SearchBox;
	private readonly probes: { probe: Probe; times: number[]; out: Float64Array; jacobian: Float64Array }[];

	/** @throws RangeError when the request cannot be compiled */
	constructor(request: FitRequest) {
		const { problem, issues } = compileProblem(request);
		if (!problem) throw new RangeError(issues.map((i) => i.message).join(' '));
		this.problem = problem;
		this.model = new KineticModel(problem);
		this.box = searchBox(problem);
		this.probes = request.runs.map((run) => {
			const times = curveTimes(lastTimeOf(run) || 1, POINTS);
			const probe = probeModel(request, run, times, () => true);
			const { m, p } = probe.model;
			return { probe, times, out: new Float64Array(m), jacobian: new Float64Array(m * p) };
		});
	}

	/** One handle a free parameter, beginning at the estimate where there is one. */
	handles(estimates: Record<string, number>): Handle[] {
		return this.problem.free.map((slot, j) => {
			const known = estimates[slot.id];
			const begin = known === undefined ? this.box.guess[j] : inner(slot, known);
			const start = Number.isFinite(begin) ? begin : this.box.guess[j];
			const reach =
				slot.scale === 'ln'
					? REACH
					: Math.max(Math.abs(start), 0.5 * Math.abs(this.box.to[j] - this.box.from[j]));
			return {
				id: slot.id,
				unit: slot.unit,
				scale: slot.scale,
				low: Math.max(this.box.lower[j], start - reach),
				high: Math.min(this.box.upper[j], start + reach),
				start
			};
		});
	}

	/** The value of a handle in the unit in which it is reported. */
	reported(place: number, x: number): number {
		const slot = this.problem.free[place];
		return toReported(slot, slot.scale === 'ln' ? Math.exp(x) : x);
	}

	/** From a typed value back to the handle; null where there is no such position. */
	position(place: number, reported: number): number | null {
		const x = inner(this.problem.free[place], reported);
		return Number.isFinite(x) ? x : null;
	}

	view(x: Float64Array): HandView | null {
		const { model, problem } = this;
		const residuals = new Float64Array(model.m);
		if (!model.evaluate(x, residuals, new Float64Array(model.m * model.p))) return null;
		const ssr = residuals.reduce((sum, r) => sum + r * r, 0);
		const freedom = problem.counted - problem.free.length;
		const runs = this.probes.map(({ probe, times, out, jacobian }) => {
			probe.model.evaluatePredictions(x, out, jacobian);
			const run = probe.problem.runs[probe.at];
			const channels = run.channels.flatMap((channel, c) =>
				channel.id.startsWith('species ')
					? []
					: [{ id: channel.id, values: out.slice(c * times.length, (c + 1) * times.length) }]
			);
			return { id: run.id, times, channels };
		});
		return { s: freedom > 0 ? Math.sqrt(ssr / freedom) : null, ssr, runs };
	}
}
