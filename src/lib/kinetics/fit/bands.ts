/**
 * Bands about fitted curves, for any run, also one that the fit did not use.
 *
 *     confidence band  y ± t √(gᵀ C g)            where the true curve lies
 *     prediction band  y ± t √(gᵀ C g + s² σ²)    where a new assay value lies
 *
 * g is the derivative of the curve with respect to the estimates, C their covariance, σ the error model's standard deviation
 * at the predicted value. Pointwise bands, first order.
 *
 * Source: Bates & Watts (1988) 2.3.2 and 2.7; Seber & Wild, Nonlinear Regression (1989) 5.1.
 */
import type { FitFinding, FitReport, FitRequest } from '../../schemas/fit';
import type { RunContent } from '../../schemas/run';
import { varianceAlong } from './covariance';
import { studentQuantile } from './distributions';
import type { KineticModel } from './model';
import { ownChannel, probeModel } from './probe';
import type { RunModel } from './run-model';
import { estimatesOf, restoreFit, type RestoredFit } from './restore';
import { sigmaFor } from './weights';

export interface PredictedSeries {
	kind: 'species' | 'channel';
	/** Id of the species or channel. */
	id: string;
	unit: string;
	/** Values at the times asked for. */
	curve: number[];
	/** Lower and upper confidence band; null where the fit gives no interval. */
	confidence: [number[], number[]] | null;
	/** Lower and upper prediction band; null also for a species without an assay channel of its own. */
	prediction: [number[], number[]] | null;
}

export interface Prediction {
	/** In the run's time unit. */
	times: number[];
	timeUnit: RunContent['timeUnit'];
	series: PredictedSeries[];
	/** Temperature or time outside what was studied. */
	findings: FitFinding[];
}

/**
 * Curves and bands of a run under a fit.
 * @param run any run of this scheme: one of the request's, or another with its own temperature and charge
 * @param times in the run's time unit, any order
 * @param options.confidence 0.95 unless given; `only` limits the series to these species or channel ids; `foreign` says that
 *   the run is none of the request's, even where its id is the same
 * @throws RangeError when the run needs an amount that is not known, or report and request do not belong together
 */
export function predict(
	report: FitReport,
	request: FitRequest,
	run: RunContent,
	times: number[],
	options: { confidence?: number; only?: string[]; foreign?: boolean } = {}
): Prediction {
	return predictRestored(restoreFit(report, request), report, run, times, options);
}

/** As `predict`, for a fit restored once and used many times. */
export function predictRestored(
	fitted: RestoredFit,
	report: FitReport,
	run: RunContent,
	times: number[],
	options: { confidence?: number; only?: string[]; foreign?: boolean } = {}
): Prediction {
	const known = (id: string) => report.parameters.some((p) => p.id === id);
	const { request } = fitted.problem;
	const { problem, model, at } = probeModel(request, run, times, known, options.foreign);
	const x = estimatesOf(report, problem);
	const predictions = new Float64Array(model.m);
	const jacobian = new Float64Array(model.m * model.p);
	if (!model.evaluatePredictions(x, predictions, jacobian))
		throw new RangeError('The curves of this run cannot be computed at the reported estimates.');
	const confidence = options.confidence ?? 0.95;
	const series = problem.runs[at].channels
		.map((channel, c) => ({ channel, c }))
		.filter(({ channel }) => !options.only || options.only.includes(channel.id.replace(/^species /, '')))
		.map(({ channel, c }) =>
			seriesOf(channel.id, c, { fitted, report, model, predictions, jacobian, run, confidence })
		);
	return { times, timeUnit: run.timeUnit, series, findings: rangeFindings(report, problem.runs[at], times) };
}

interface Pieces {
	fitted: RestoredFit;
	report: FitReport;
	model: KineticModel;
	predictions: Float64Array;
	jacobian: Float64Array;
	run: RunContent;
	confidence: number;
}

function seriesOf(id: string, c: number, pieces: Pieces): PredictedSeries {
	const { fitted, report, model, predictions, jacobian, run, confidence } = pieces;
	const { active, spread, s, degreesOfFreedom } = fitted.uncertainty;
	const isSpecies = id.startsWith('species ');
	const name = isSpecies ? id.slice(8) : id;
	const unit = model.problem.runs[model.points[0].run].channels[c].unit;
	const rows = model.points.flatMap((p, i) => (p.channel === c ? [i] : []));
	const curve = rows.map((i) => predictions[i]);
	const base = { kind: isSpecies ? ('species' as const) : ('channel' as const), id: name, unit, curve };
	if (s === null) return { ...base, confidence: null, prediction: null };
	const t = studentQuantile(0.5 + confidence / 2, degreesOfFreedom);
	const gradient = new Float64Array(active.length);
	const variance = rows.map((i) => {
		active.forEach((j, a) => (gradient[a] = jacobian[j * model.m + i]));
		return s * s * varianceAlong(spread, gradient);
	});
	const assay = isSpecies ? run.channels.find((ch) => ownChannel(ch, name) && ch.unit === unit)?.id : name;
	const band = (extra: (value: number) => number): [number[], number[]] => {
		const half = curve.map((y, k) => t * Math.sqrt(variance[k] + extra(y)));
		return [curve.map((y, k) => y - half[k]), curve.map((y, k) => y + half[k])];
	};
	const finite = variance.every(Number.isFinite);
	const noise = (y: number) =>
		responseVariance(report, assay!) ?? (s * sigmaFor(fitted.problem, assay!, y)) ** 2;
	return {
		...base,
		confidence: finite ? band(() => 0) : null,
		prediction: finite && assay !== undefined ? band(noise) : null
	};
}

/** Variance of a new value where each response has its own (determinant criterion). */
function responseVariance({ determinant }: FitReport, channel: string): number | null {
	const at = determinant?.responses.indexOf(channel) ?? -1;
	return at < 0 ? null : determinant!.residualCovariance[at][at];
}

function rangeFindings(report: FitReport, run: RunModel, times: number[]): FitFinding[] {
	const celsius = run.temperatureK - 273.15;
	const [low, high] = report.studied.temperatureC;
	const findings: FitFinding[] = [];
	if (celsius < low - 0.5 || celsius > high + 0.5)
		findings.push({
			code: 'outside-studied-temperature',
			level: 'caution',
			message: `${celsius.toFixed(1)} °C lies outside the studied range of ${low.toFixed(1)} to ${high.toFixed(1)} °C: the band does not cover a change of mechanism.`
		});
	const last = (Math.max(0, ...times) * run.timeFactor) / 3600;
	if (last > report.studied.lastTimeH * 1.05)
		findings.push({
			code: 'outside-studied-time',
			level: 'note',
			message: `Times beyond ${+report.studied.lastTimeH.toPrecision(3)} h were not sampled in the fit.`
		});
	return findings;
}

export interface ConfirmationPoint {
	channel: string;
	index: number;
	time: number;
	/** The value, or the limit that it lies below or above. */
	observed: number;
	kind: 'value' | 'below' | 'above';
	predicted: number;
	low: number;
	high: number;
	/** Whether the value lies in the band; for a limit, whether the band reaches beyond it. */
	inside: boolean;
}

export interface Confirmation {
	/** Values inside the prediction band. */
	inside: number;
	/** Values counted; limits are listed but not counted. */
	counted: number;
	confidence: number;
	points: ConfirmationPoint[];
	findings: FitFinding[];
}

/**
 * Predicts a run that the fit did not use (its id may be that of one it used: it is not taken for it) and counts its values inside the prediction band.
 * Rows at time zero are left out (the charge predicts them), as are excluded cells.
 * @throws RangeError when the fit gives no band
 */
export function confirmationRun(
	report: FitReport,
	request: FitRequest,
	run: RunContent,
	confidence = 0.95
): Confirmation {
	const rows = run.timepoints.map((row, index) => ({ row, index })).filter(({ row }) => row.time > 0);
	const times = rows.map(({ row }) => row.time);
	const only = run.channels.map((c) => c.id);
	const { series, findings } = predict(report, request, run, times, { confidence, only, foreign: true });
	const out = new Set((run.exclusions ?? []).map((e) => `${e.index}|${e.channel ?? '*'}`));
	const points: ConfirmationPoint[] = [];
	for (const { kind, id, curve, prediction } of series) {
		if (kind !== 'channel') continue;
		if (!prediction)
			throw new RangeError('The fit gives no prediction band: its constants are not determined by its data.');
		rows.forEach(({ row, index }, k) => {
			const cell = row.values[id];
			if (cell === null || cell === undefined || out.has(`${index}|*`) || out.has(`${index}|${id}`)) return;
			const [low, high] = [prediction[0][k], prediction[1][k]];
			const common = { channel: id, index, time: row.time, predicted: curve[k], low, high };
			if (typeof cell === 'number')
				points.push({ ...common, observed: cell, kind: 'value', inside: cell >= low && cell <= high });
			else if ('below' in cell)
				points.push({ ...common, observed: cell.below, kind: 'below', inside: low <= cell.below });
			else points.push({ ...common, observed: cell.above, kind: 'above', inside: high >= cell.above });
		});
	}
	const values = points.filter((p) => p.kind === 'value');
	return {
		inside: values.filter((p) => p.inside).length,
		counted: values.length,
		confidence,
		points,
		findings
	};
}
