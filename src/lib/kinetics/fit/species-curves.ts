/** Concentrations of every species at the sampled times of every run, in mol/L, for given estimates. */
import { constantLinear } from './affine';
import { KineticModel } from './model';
import type { Point } from './points';
import type { KineticProblem } from './problem';

/** The same runs with one plain channel for every species, at these times (recorded time, s). */
export function speciesProblem(
	problem: KineticProblem,
	timesS?: (run: number) => Float64Array
): KineticProblem {
	const runs = problem.runs.map((run) => {
		const times = timesS ? timesS(run.index) : run.timesS;
		const channels = problem.species.map((id, i) => ({
			id,
			unit: 'mol/L',
			species: Int32Array.of(i),
			weights: Float64Array.of(1),
			lnResponse: constantLinear(0),
			areaPercent: false,
			loq: null,
			scaleFitted: false
		}));
		const points: Point[] = Array.from(times).flatMap((_, time) =>
			channels.map((_c, channel) => ({
				run: run.index,
				channel,
				index: time,
				time,
				kind: 'value' as const,
				observed: 0,
				sigma: 1
			}))
		);
		return { ...run, timesS: times, channels, points };
	});
	return { ...problem, runs, points: runs.flatMap((r) => r.points) };
}

/** curves[run][k·n + i] of species i at timesS[k]; null where they cannot be computed. */
export function speciesCurves(problem: KineticProblem, x: Float64Array): Float64Array[] | null {
	const dense = speciesProblem(problem);
	const model = new KineticModel(dense);
	const out = new Float64Array(model.m);
	if (!model.evaluatePredictions(x, out, new Float64Array(model.m * model.p))) return null;
	let from = 0;
	return dense.runs.map((run) => {
		const part = out.slice(from, from + run.points.length);
		from += run.points.length;
		return part;
	});
}
