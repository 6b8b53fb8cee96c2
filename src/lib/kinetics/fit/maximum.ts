/**
 * When a species is at its most, and how much of it there is then: quantities that people decide by, with their intervals.
 *
 *     t* = argmax y(t, θ),  y* = y(t*, θ)
 *     var(q) = gᵀ C g,  g_j = [q(θ + h e_j) − q(θ − h e_j)]/2h     for q = t* and q = y*
 *
 * t* is the vertex of the parabola through the highest point of a fine grid and its neighbours. C is the covariance of the
 * estimates on the scale of estimation; h a tenth of a standard error. First order (delta method).
 *
 * Source: Seber & Wild, Nonlinear Regression (1989) 5.1.
 */
import type { FitReport, FitRequest } from '../../schemas/fit';
import { studentQuantile } from './distributions';
import { probeModel, type Probe } from './probe';
import { restoreFit, type RestoredFit } from './restore';
import { runId } from './slots';

export interface Maximum {
	/** Id of the run within the request. */
	run: string;
	species: string;
	/** In the run's time unit. */
	time: number;
	timeUnit: string;
	timeError: number | null;
	timeInterval: [number, number] | null;
	value: number;
	unit: string;
	valueError: number | null;
	valueInterval: [number, number] | null;
}

const COARSE = 160;
const FINE = 61;
/** Half width of the fine grid, as a share of the time of the maximum. */
const REACH = 0.12;
/** A maximum must stand above both ends of the studied time by this share of itself. */
const CLEAR = 0.02;

interface Vertex {
	time: number;
	value: number;
}

/** Vertex through the highest grid point and its neighbours; null where the highest point is an end. */
function vertex(times: number[], values: ArrayLike<number>): Vertex | null {
	let top = 0;
	for (let k = 1; k < times.length; k++) if (values[k] > values[top]) top = k;
	if (top === 0 || top === times.length - 1) return null;
	const [t0, t1, t2] = times.slice(top - 1, top + 2);
	const [y0, y1, y2] = [values[top - 1], values[top], values[top + 1]];
	const left = (y1 - y0) / (t1 - t0);
	const right = (y2 - y1) / (t2 - t1);
	const curvature = (right - left) / (t2 - t0);
	if (!(curvature < 0)) return { time: t1, value: y1 };
	const time = 0.5 * (t0 + t1) - left / (2 * curvature);
	return { time, value: y0 + left * (time - t0) + curvature * (time - t0) * (time - t1) };
}

class SpeciesCurves {
	private readonly probe: Probe;
	private readonly jacobian: Float64Array;
	private readonly out: Float64Array;
	readonly ids: string[];
	readonly units: string[];

	constructor(
		request: FitRequest,
		run: FitRequest['runs'][number],
		readonly times: number[],
		known: (id: string) => boolean
	) {
		this.probe = probeModel(request, run, times, known);
		const { model, problem, at } = this.probe;
		this.jacobian = new Float64Array(model.m * model.p);
		this.out = new Float64Array(model.m);
		this.ids = problem.runs[at].channels.map((c) => c.id);
		this.units = problem.runs[at].channels.map((c) => c.unit);
	}

	/** Values of the channel at that place, over all times. */
	at(x: Float64Array, place: number): Float64Array | null {
		if (!this.probe.model.evaluatePredictions(x, this.out, this.jacobian)) return null;
		const n = this.times.length;
		return this.out.slice(place * n, (place + 1) * n);
	}
}

/** Standard errors of time and value by central differences; null where a neighbour has no maximum in sight. */
function errorsOf(fitted: RestoredFit, curves: SpeciesCurves, place: number): [number, number] | null {
	const { covariance, errors } = fitted.uncertainty;
	const gradient: [number, number][] = [];
	for (let j = 0; j < fitted.x.length; j++) {
		if (!Number.isFinite(errors[j])) {
			// At a bound: held there, so that it adds nothing.
			if (covariance[j].every((c) => c === 0)) {
				gradient.push([0, 0]);
				continue;
			}
			return null;
		}
		const h = 0.1 * errors[j];
		const ends = [h, -h].map((step) => {
			const x = fitted.x.slice();
			x[j] += step;
			const values = curves.at(x, place);
			return values && vertex(curves.times, values);
		});
		if (!ends[0] || !ends[1]) return null;
		gradient.push([(ends[0].time - ends[1].time) / (2 * h), (ends[0].value - ends[1].value) / (2 * h)]);
	}
	const error = (q: 0 | 1): number =>
		Math.sqrt(
			gradient.reduce(
				(sum, g, i) => sum + gradient.reduce((inner, k, j) => inner + g[q] * covariance[i][j] * k[q], 0),
				0
			)
		);
	return [error(0), error(1)];
}

const evenly = (from: number, to: number, count: number): number[] =>
	Array.from({ length: count }, (_, k) => from + ((to - from) * k) / (count - 1));

/**
 * Maxima inside the studied time of one run, one for each species that has such a maximum.
 * @param index place of the run in the request
 * @param confidence of the t intervals, 0.95 unless given
 * @throws RangeError when report and request do not belong together
 */
export function maxima(report: FitReport, request: FitRequest, index: number, confidence = 0.95): Maximum[] {
	const run = request.runs[index];
	const last = Math.max(0, ...run.timepoints.map((p) => p.time));
	if (!(last > 0)) return [];
	const fitted = restoreFit(report, request);
	const known = (id: string) => report.parameters.some((p) => p.id === id);
	const { degreesOfFreedom } = fitted.uncertainty;
	const t = degreesOfFreedom > 0 ? studentQuantile(0.5 + confidence / 2, degreesOfFreedom) : null;
	const coarse = new SpeciesCurves(request, run, evenly(0, last, COARSE), known);
	return coarse.ids.flatMap((id, place): Maximum[] => {
		if (!id.startsWith('species ')) return [];
		const values = coarse.at(fitted.x, place);
		const rough = values && vertex(coarse.times, values);
		if (!values || !rough) return [];
		if (Math.max(values[0], values[values.length - 1]) > (1 - CLEAR) * rough.value) return [];
		const grid = evenly(rough.time * (1 - REACH), Math.min(last, rough.time * (1 + REACH)), FINE);
		const fine = new SpeciesCurves(request, run, grid, known);
		const best = vertex(grid, fine.at(fitted.x, place) ?? []);
		if (!best) return [];
		const errors = t === null ? null : errorsOf(fitted, fine, place);
		const interval = (value: number, error: number | undefined): [number, number] | null =>
			errors && t !== null && error !== undefined ? [value - t * error, value + t * error] : null;
		return [
			{
				run: runId(run, index),
				species: id.slice(8),
				time: best.time,
				timeUnit: run.timeUnit,
				timeError: errors?.[0] ?? null,
				timeInterval: interval(best.time, errors?.[0]),
				value: best.value,
				unit: fine.units[place],
				valueError: errors?.[1] ?? null,
				valueInterval: interval(best.value, errors?.[1])
			}
		];
	});
}
