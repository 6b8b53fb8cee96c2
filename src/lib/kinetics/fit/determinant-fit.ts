/**
 * A fit by the determinant criterion: many starts, the distinct minima, and the report with approximate errors.
 *
 *     covariance = 2/(N − p) · H⁻¹,  H the second derivatives of ln |ZᵀZ| at the minimum,  N complete rows
 *     interval   = estimate ± t(N − p) · error
 *
 * These follow from s² = d/(N − p) and Ω = d H for the determinant d itself: the region (θ − θ̂)ᵀ Ω (θ − θ̂)/2 ≤ p s² F(p, N − p).
 * Sums of squares in the report describe the misfit at these estimates; they are not what was minimised, so that s, AICc, BIC and
 * the test of lack of fit, which rest on them, are left out.
 *
 * Source: Bates & Watts (1988) 4.2 (from memory); Box & Draper, Biometrika 52 (1965) 355.
 */
import type { DeterminantSummary, FitReport } from '../../schemas/fit';
import { watchOver } from './cancelled';
import { crossProduct, DeterminantCriterion } from './determinant';
import { exactHessian, minimiseDeterminant, type DeterminantMinimum } from './determinant-search';
import type { FitContext } from './fit';
import type { LeastSquaresResult } from './least-squares';
import type { KineticModel } from './model';
import { cholesky, invertPositiveDefinite } from './positive-definite';
import { USUAL_WORK, type ProgressMeter } from './progress';
import { assembleReport } from './report';
import { responseDependencies, responseRows } from './response-rows';
import type { Minimum } from './search';
import { startingPoints, type SearchBox } from './starts';
import { uncertaintyFromCovariance, type Uncertainty } from './uncertainty';

/** Most starts beside the least-squares minima, and how far each is followed before the best of them are. */
const STARTS = 20;
const ROUGH_STEPS = 60;

interface Found {
	minimum: DeterminantMinimum;
	starts: number;
	firstStart: number;
}

/** The report of a request whose `criterion` is 'determinant'. `context.outcome` is its search by least squares. */
export function determinantReport(context: FitContext): FitReport {
	const { problem, model, box, outcome, hooks, meter } = context;
	model.watch = watchOver(hooks.cancelled);
	const layout = responseRows(problem);
	const dependencies = responseDependencies(problem, layout);
	const criterion = new DeterminantCriterion(model, layout.rows, dependencies.independent);
	const leastSquares = criterion.at(outcome.minima[0].result.x).value;
	const { starts, seed } = problem.request.options;
	const points = [
		...outcome.minima.map((m) => m.result.x),
		...startingPoints(box, Math.min(starts, STARTS), seed)
	];
	meter.begin('searching by the determinant criterion', USUAL_WORK.start * points.length, USUAL_WORK.report);
	const found = searchAll(criterion, points, box, meter);
	const [best] = found;
	const u = spreadOf(criterion, best.minimum, layout.rows.length, context);
	const minima = found.map((f) => asMinimum(f, model));
	const rows = layout.rows.length;
	const summary: DeterminantSummary = {
		responses: layout.responses,
		rows,
		rowsLeftOut: layout.leftOut,
		logDeterminant: best.minimum.value,
		logDeterminantLeastSquares: leastSquares,
		...residualSpread(model, best.minimum.x, layout.rows, u.degreesOfFreedom),
		dependencies: dependencies.weights.map((weights, k) => ({
			weights: Object.fromEntries(layout.responses.map((id, j) => [id, weights[j]])),
			words: dependencies.words[k]
		})),
		starts: { reached: best.starts, run: points.length }
	};
	const evaluations = outcome.evaluations + criterion.evaluations;
	const converged = found.reduce((sum, f) => sum + (f.minimum.converged ? f.starts : 0), 0);
	const own = { ...outcome, minima, evaluations, startsRun: points.length, startsConverged: converged };
	return assembleReport({ ...context, outcome: own }, u, null, {
		criterion: 'determinant',
		determinant: summary,
		residualStandardError: null,
		aicc: null,
		bic: null,
		lackOfFit: null,
		// −2 ln of the ratio of likelihoods, as Δ AICc is for equal numbers of parameters.
		deltas: found.slice(1).map((f) => rows * (f.minimum.value - best.minimum.value))
	});
}

function searchAll(
	criterion: DeterminantCriterion,
	points: Float64Array[],
	box: SearchBox,
	meter: ProgressMeter
): Found[] {
	const found: Found[] = [];
	points.forEach((start, k) => {
		const minimum = minimiseDeterminant(criterion, start, box, ROUGH_STEPS);
		meter.step(k + 1, points.length);
		if (minimum.value === Infinity) return;
		const same = found.find((f) => near(f.minimum, minimum, box));
		if (!same) found.push({ minimum, starts: 1, firstStart: k });
		else {
			same.starts++;
			if (minimum.value < same.minimum.value) same.minimum = minimum;
		}
	});
	const byValue = () => found.sort((a, b) => a.minimum.value - b.minimum.value);
	for (const f of byValue().slice(0, 8))
		if (!f.minimum.converged) f.minimum = minimiseDeterminant(criterion, f.minimum.x, box);
	const settled = byValue().filter((f, k) => k === 0 || f.minimum.converged);
	return mergeMinima(settled, box);
}

/** Followed to their ends, starts that were apart before can have come to the same minimum. @param found lowest first */
export function mergeMinima(found: Found[], box: Pick<SearchBox, 'from' | 'to'>): Found[] {
	const distinct: Found[] = [];
	for (const one of found) {
		const same = distinct.find((f) => near(f.minimum, one.minimum, box));
		if (!same) distinct.push({ ...one });
		else {
			same.starts += one.starts;
			same.firstStart = Math.min(same.firstStart, one.firstStart);
		}
	}
	return distinct;
}

function near(a: DeterminantMinimum, b: DeterminantMinimum, box: Pick<SearchBox, 'from' | 'to'>): boolean {
	return a.x.every((v, j) => Math.abs(v - b.x[j]) <= 1e-3 * (Math.abs(box.to[j] - box.from[j]) || 1));
}

/** Covariance from the second derivatives; without numbers where they are not positive definite. */
function spreadOf(
	criterion: DeterminantCriterion,
	{ x, activeBounds }: DeterminantMinimum,
	rows: number,
	{ problem }: FitContext
): Uncertainty {
	const active = problem.free.map((_, j) => j).filter((j) => activeBounds[j] === 0);
	const dof = rows - problem.free.length;
	const { scale } = criterion.at(x);
	const hessian = exactHessian(criterion, x, scale, active);
	const inverse = cholesky(hessian) && invertPositiveDefinite(hessian);
	const covariance = inverse?.map((row) => row.map((v) => (2 / dof) * v)) ?? null;
	return uncertaintyFromCovariance(covariance, active, problem.free.length, dof);
}

/** A minimum of the determinant as the report's other parts know one: residuals and Jacobian at its estimates. */
function asMinimum({ minimum, starts, firstStart }: Found, model: KineticModel): Minimum {
	const residuals = new Float64Array(model.m);
	const jacobian = new Float64Array(model.m * model.p);
	model.evaluate(minimum.x, residuals, jacobian);
	const result: LeastSquaresResult = {
		status: minimum.converged ? 'gradient' : 'evaluations',
		converged: minimum.converged,
		x: minimum.x,
		residuals,
		jacobian,
		ssr: residuals.reduce((sum, r) => sum + r * r, 0),
		evaluations: 0,
		iterations: 0,
		optimality: minimum.optimality,
		activeBounds: minimum.activeBounds
	};
	return { result, starts, firstStart };
}

function residualSpread(
	model: KineticModel,
	x: Float64Array,
	rows: number[][],
	dof: number
): Pick<DeterminantSummary, 'residualCovariance' | 'residualCorrelation'> {
	const out = new Float64Array(model.m);
	model.evaluatePredictions(x, out, new Float64Array(model.m * model.p));
	const z = rows.map((row) => row.map((i) => out[i] - model.points[i].observed));
	const squares = crossProduct(z, z);
	return {
		residualCovariance: squares.map((row) => row.map((v) => v / dof)),
		residualCorrelation: squares.map((row, i) =>
			row.map((v, j) => (i === j ? 1 : v / Math.sqrt(squares[i][i] * squares[j][j]) || 0))
		)
	};
}
