/**
 * A stored report brought back to life: its problem, estimates and uncertainty, recomputed from the request.
 */
import type { FitReport, FitRequest } from '../../schemas/fit';
import { KineticModel } from './model';
import { compileProblem, type KineticProblem } from './problem';
import { fromReported, type Slot } from './slots';
import { uncertainty, uncertaintyFromCovariance, type Uncertainty } from './uncertainty';

export interface RestoredFit {
	problem: KineticProblem;
	model: KineticModel;
	/** Estimates on the scale of estimation, in the order of `report.fittedIds`. */
	x: Float64Array;
	uncertainty: Uncertainty;
}

const inner = (slot: Slot, reported: number): number => {
	const si = fromReported(slot, reported);
	return slot.scale === 'ln' ? Math.log(si) : si;
};

/** Estimates of a report on the scale of estimation. @throws RangeError when report and request do not belong together. */
export function estimatesOf(report: FitReport, problem: KineticProblem): Float64Array {
	const ids = problem.free.map((s) => s.id);
	if (ids.length !== report.fittedIds.length || ids.some((id, j) => id !== report.fittedIds[j]))
		throw new RangeError(
			`The report and the request do not belong together: the report fitted ${report.fittedIds.join(', ')}; the request fits ${ids.join(', ')}.`
		);
	return Float64Array.from(problem.free, (slot) => {
		const found = report.parameters.find((p) => p.id === slot.id);
		if (!found) throw new RangeError(`The report has no parameter "${slot.id}".`);
		return inner(slot, found.estimate);
	});
}

/** @throws RangeError when the request cannot be compiled or does not belong to the report. */
export function restoreFit(report: FitReport, request: FitRequest): RestoredFit {
	const { problem, issues } = compileProblem(request);
	if (!problem) throw new RangeError(issues.map((i) => i.message).join(' '));
	const model = new KineticModel(problem);
	const x = estimatesOf(report, problem);
	const residuals = new Float64Array(model.m);
	const jacobian = new Float64Array(model.m * model.p);
	if (!model.evaluate(x, residuals, jacobian))
		throw new RangeError('The curves cannot be computed at the reported estimates.');
	const activeBounds = problem.free.map((slot) =>
		report.parameters.find((p) => p.id === slot.id)?.state === 'at bound' ? 1 : 0
	);
	return { problem, model, x, uncertainty: spreadOf(report, problem, jacobian, activeBounds) };
}

function spreadOf(
	report: FitReport,
	problem: KineticProblem,
	jacobian: Float64Array,
	activeBounds: number[]
): Uncertainty {
	if (report.criterion !== 'determinant')
		return uncertainty(problem, { ssr: report.weightedSsr, jacobian, activeBounds });
	const active = activeBounds.flatMap((b, j) => (b === 0 ? [j] : []));
	const known = active.length > 0 && active.every((j) => report.covariance[j][j] > 0);
	const covariance = known ? active.map((j) => active.map((k) => report.covariance[j][k])) : null;
	return uncertaintyFromCovariance(covariance, active, problem.free.length, report.degreesOfFreedom);
}

/** @throws RangeError for a fit that did not minimise a sum of squares: `what` rests on one. */
export function requireLeastSquares(report: FitReport, what: string): void {
	if (report.criterion === 'determinant')
		throw new RangeError(
			`${what} rests on sums of squares and cannot be had of a fit by the determinant criterion. Ask it of a fit by least squares.`
		);
}
