/**
 * Which sample would tell two fitted schemes apart: where |y₁ − y₂|/√(se₁² + se₂² + s²) is largest, over the runs, species and times
 * that both can predict.
 *
 * Source: Hunter & Reiner, Technometrics 7 (1965) 307 (designs to discriminate between rival models).
 */
import type { FitReport, FitRequest } from '../../schemas/fit';
import { predictRestored } from './bands';
import { studentQuantile } from './distributions';
import { restoreFit, type RestoredFit } from './restore';
import { runId } from './slots';

export interface ComparedScheme {
	name: string;
	request: FitRequest;
	report: FitReport;
}

export interface SeparatingSample {
	run: string;
	temperatureC: number;
	/** In the run's time unit. */
	time: number;
	timeUnit: string;
	species: string;
	unit: string;
	/** What each of the two best schemes predicts, in their order in `rows`. */
	predictions: [number, number];
	/** Difference over its standard error with one new value. */
	separation: number;
}

/** The sample that separates two fitted schemes most; null where they have no run or species in common. */
export function separatingSample(first: ComparedScheme, second: ComparedScheme): SeparatingSample | null {
	const [a, b] = [first, second].map((s) => restoreFit(s.report, s.request));
	let best: SeparatingSample | null = null;
	first.request.runs.forEach((run, index) => {
		const id = runId(run, index);
		const other = second.request.runs.find((r, i) => runId(r, i) === id);
		if (!other) return;
		const times = denseTimes(run.timepoints.map((t) => t.time));
		const one = seriesOf(a, first.report, { ...run, id }, times);
		const two = seriesOf(b, second.report, { ...other, id }, times);
		for (const [species, left] of one) {
			const right = two.get(species);
			if (!right || right.unit !== left.unit) continue;
			times.forEach((time, k) => {
				const noise = Math.max(left.noise, right.noise);
				const gap = Math.abs(left.curve[k] - right.curve[k]);
				const separation = gap / Math.sqrt(left.se[k] ** 2 + right.se[k] ** 2 + noise ** 2);
				if (!(separation > (best?.separation ?? 0))) return;
				const predictions: [number, number] = [left.curve[k], right.curve[k]];
				const temperatureC = a.problem.runs[index].temperatureK - 273.15;
				best = {
					run: id,
					temperatureC,
					time,
					timeUnit: run.timeUnit,
					species,
					unit: left.unit,
					predictions,
					separation
				};
			});
		}
	});
	return best;
}

interface CurveWithError {
	unit: string;
	curve: number[];
	se: number[];
	noise: number;
}

function seriesOf(
	fitted: RestoredFit,
	report: FitReport,
	run: FitRequest['runs'][number],
	times: number[]
): Map<string, CurveWithError> {
	const out = new Map<string, CurveWithError>();
	const t = studentQuantile(0.975, report.degreesOfFreedom);
	for (const s of predictRestored(fitted, report, run, times, { confidence: 0.95 }).series) {
		if (s.kind !== 'species') continue;
		const { confidence } = s;
		out.set(s.id, {
			unit: s.unit,
			curve: s.curve,
			se: s.curve.map((y, k) => (confidence ? (confidence[1][k] - y) / t : 0)),
			noise: report.residualStandardError ?? 0
		});
	}
	return out;
}

/** Times between and around those sampled: 60 of them, evenly on the logarithm, to one and a half times the last. */
function denseTimes(sampled: number[]): number[] {
	const positive = sampled.filter((t) => t > 0);
	const low = 0.5 * Math.min(...positive);
	const high = 1.5 * Math.max(...positive);
	return Array.from({ length: 60 }, (_, k) => Number((low * (high / low) ** (k / 59)).toPrecision(3)));
}
