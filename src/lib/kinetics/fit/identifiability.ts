/**
 * Can it be known? Two checks of scheme and channels alone, before any fit, whatever was measured.
 *
 * Rank: with noise-free values at many times, the derivatives of everything observed with respect to the parameters must be
 * independent. A direction along which nothing observed changes is not identifiable by any number of samples.
 *
 * Exchange: two rate constants may be swapped without any observed change when another parameter (a response factor, an
 * unknown charge) can make up for it: A → B → C with only a scaled B signal has two solutions that fit alike. Each pair is
 * swapped at a generic point and the scale parameters are fitted to the unswapped curves; a zero misfit is a symmetry.
 *
 * Sources: Rothenberg, Econometrica 39 (1971) 577 (rank); Bellman & Åström, Math. Biosci. 7 (1970) 329 (structural
 * identifiability); the two solutions of consecutive first-order steps: Alcock, Benton & Moore, Trans. Faraday Soc. 66 (1970)
 * 608 (from memory).
 */
import type { FitFinding } from '../../schemas/fit';
import type { Watch } from './cancelled';
import { covarianceFromJacobian } from './covariance';
import { leastSquares } from './levenberg-marquardt';
import { KineticModel } from './model';
import type { Point } from './points';
import type { KineticProblem } from './problem';
import { haltonSequence } from './sequence';
import type { SearchBox } from './starts';

/** A direction of the parameters along which nothing observed changes. */
export interface FlatDirection {
	/** Ids of the members, most involved first. */
	parameters: string[];
	/** Movement of each along the direction, on the scale of estimation, largest 1. */
	weights: number[];
}

export interface Identifiability {
	flat: FlatDirection[];
	/** Pairs of rate constants that can be exchanged without any observed change. */
	exchanges: [string, string][];
}

const RANK = 1e-7;

/** A generic point well inside the span of the starts, so that rates differ and the times show them. */
function genericPoint(box: SearchBox, which: number): Float64Array {
	const u = haltonSequence(box.from.length, 97)(which + 3);
	return Float64Array.from(u, (v, j) => box.from[j] + (0.3 + 0.4 * v) * (box.to[j] - box.from[j]));
}

/** Every channel of every run that has at least one value, at a dense set of times of that run. */
function denseProblem(problem: KineticProblem): KineticProblem {
	const runs = problem.runs.map((run) => {
		const last = run.timesS[run.timesS.length - 1] || 1;
		const first = Array.from(run.timesS).find((t) => t > 0) ?? last;
		const count = 14;
		const timesS = Float64Array.from(
			{ length: count },
			(_, k) => first * (last / first || 1) ** (k / (count - 1)) * (1 + 1e-3 * k)
		);
		const used = [...new Set(run.points.map((p) => p.channel))];
		const points: Point[] = used.flatMap((channel) =>
			Array.from(timesS, (_, time) => ({
				run: run.index,
				channel,
				index: time,
				time,
				kind: 'value' as const,
				observed: 0,
				sigma: 1
			}))
		);
		return { ...run, timesS, points };
	});
	return { ...problem, runs, points: runs.flatMap((r) => r.points) };
}

/** Structural checks of a compiled problem. Cost: a few evaluations of the model for every pair of rate constants. */
export function identifiability(
	problem: KineticProblem,
	box: SearchBox,
	watch: Watch | null = null
): Identifiability {
	if (problem.free.length === 0) return { flat: [], exchanges: [] };
	const dense = denseProblem(problem);
	const model = new KineticModel(dense);
	model.watch = watch;
	const first = flatAt(model, genericPoint(box, 0));
	// A direction that is flat at one point only is an accident of that point.
	const flat = first.length > 0 && flatAt(model, genericPoint(box, 1)).length > 0 ? first : [];
	return { flat, exchanges: flat.length > 0 ? [] : exchanges(dense, box, watch) };
}

function flatAt(model: KineticModel, x: Float64Array): FlatDirection[] {
	const { m, p } = model;
	const jacobian = new Float64Array(m * p);
	if (!model.evaluatePredictions(x, new Float64Array(m), jacobian)) return [];
	const spread = covarianceFromJacobian(jacobian, m, p);
	return spread.singularValues.flatMap((value, k) =>
		value > RANK * spread.singularValues[0]
			? []
			: [describeDirection(model.problem, spread.directions[k], spread.columnNorms)]
	);
}

/** The members of a right singular vector, in the parameters' own scale. */
export function describeDirection(
	problem: KineticProblem,
	direction: number[],
	columnNorms: number[],
	active: number[] = direction.map((_, j) => j)
): FlatDirection {
	const moves = direction.map((v, j) => ({
		id: problem.free[active[j]].id,
		share: Math.abs(v),
		weight: v / (columnNorms[j] || 1)
	}));
	const members = moves.filter((m) => m.share > 0.1).sort((a, b) => b.share - a.share);
	const largest = Math.max(...members.map((m) => Math.abs(m.weight))) || 1;
	return { parameters: members.map((m) => m.id), weights: members.map((m) => m.weight / largest) };
}

function exchanges(problem: KineticProblem, box: SearchBox, watch: Watch | null): [string, string][] {
	const rates = problem.free.flatMap((s, j) => (s.kind === 'rate' ? [j] : []));
	const scales = problem.free.flatMap((s, j) => (s.kind === 'response' || s.kind === 'amount' ? [j] : []));
	const found: [string, string][] = [];
	if (scales.length === 0) return found;
	for (let a = 0; a < rates.length; a++)
		for (let b = a + 1; b < rates.length && rates.length <= 8; b++)
			if (exchangeable(problem, box, rates[a], rates[b], scales, watch))
				found.push([problem.free[rates[a]].id, problem.free[rates[b]].id]);
	return found;
}

function exchangeable(
	problem: KineticProblem,
	box: SearchBox,
	a: number,
	b: number,
	scales: number[],
	watch: Watch | null
): boolean {
	const x = genericPoint(box, 2);
	if (Math.abs(x[a] - x[b]) < 0.5) x[a] += 1;
	const target = new KineticModel(problem);
	target.watch = watch;
	const residuals = new Float64Array(target.m);
	const jacobian = new Float64Array(target.m * target.p);
	if (!target.evaluate(x, residuals, jacobian)) return false;
	const observed = target.predictions.slice();
	const size = observed.reduce((sum, v) => sum + v * v, 0);
	const points = problem.points.map((p, i) => ({ ...p, observed: observed[i] }));
	const model = new KineticModel(problem, points);
	model.watch = watch;
	const swapped = x.slice();
	swapped[a] = x[b];
	swapped[b] = x[a];
	const lower = swapped.slice();
	const upper = swapped.slice();
	for (const j of scales) {
		lower[j] = problem.free[j].scale === 'ln' ? swapped[j] - 12 : 0;
		upper[j] = problem.free[j].scale === 'ln' ? swapped[j] + 12 : 1e6 * (Math.abs(swapped[j]) || 1);
	}
	const result = leastSquares(model, swapped, { lower, upper, maxEvaluations: 30 });
	return result.ssr <= 1e-14 * size;
}

/** The structural checks in words. */
export function identifiabilityFindings(
	problem: KineticProblem,
	box: SearchBox,
	watch: Watch | null = null
): FitFinding[] {
	const { flat, exchanges: pairs } = identifiability(problem, box, watch);
	return [
		...flat.map((direction) => ({
			code: 'structurally-undetermined',
			level: 'stop' as const,
			message:
				direction.parameters.length === 1
					? `${direction.parameters[0]} has no effect on anything that is assayed. Fix it, or assay another species.`
					: `No number of samples of this kind can tell ${joined(direction.parameters)} apart: ${combinationWords(direction)}. Fix one of them, or assay another species.`,
			parameters: direction.parameters
		})),
		...pairs.map(([a, b]) => ({
			code: 'exchange-symmetry',
			level: 'caution' as const,
			message: `${a} and ${b} can be exchanged without any change in what is assayed, because an unknown scale makes up for it: expect two solutions that fit equally well.`,
			parameters: [a, b]
		}))
	];
}

export const joined = (ids: string[]): string =>
	ids.length < 2 ? ids.join('') : `${ids.slice(0, -1).join(', ')} and ${ids[ids.length - 1]}`;

/** What a flat direction leaves determined, in words. */
export function combinationWords({ parameters, weights }: FlatDirection): string {
	if (parameters.length === 1) return `${parameters[0]} has no effect that the data could show`;
	if (parameters.length === 2) {
		const [a, b] = parameters;
		const ratio = weights[0] / weights[1];
		if (Math.abs(ratio - 1) < 0.05) return `only the ratio ${a} / ${b} is determined`;
		if (Math.abs(ratio + 1) < 0.05) return `only the product ${a} · ${b} is determined`;
		return `only one combination of ${a} and ${b} is determined`;
	}
	return `only combinations of ${joined(parameters)} are determined`;
}
