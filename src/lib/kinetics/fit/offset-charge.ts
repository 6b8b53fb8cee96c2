/**
 * Time zero and charge: two things that the clock and the balance get wrong, and that look alike.
 *
 * A late clock and a wrong charge look alike: for a single first-order decay A₀ e^{−k(t+τ)} only A₀ e^{−kτ} is determined. Where
 * one of the two is fitted, this checks whether the other would explain the data as well.
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import { isFitted } from '../../schemas/quantity';
import { covarianceFromJacobian } from './covariance';
import type { FindingsInput } from './findings';
import { watched } from './model';
import { compileProblem } from './problem';
import { searchMinima } from './search';
import { runId, toReported } from './slots';
import { searchBox } from './starts';
import { aicc } from './statistics';
import { figure, withUnit } from './words';

export function offsetOrCharge({ problem, model: like, best }: FindingsInput): FitFinding[] {
	return problem.runs.flatMap((run) => {
		const given = problem.request.runs[run.index];
		const charged = Object.entries(given.initial).filter(([, a]) => isFitted(a) || a.value !== 0);
		const fittedCharges = charged.filter(([, a]) => isFitted(a));
		const offset = run.offset.terms.length > 0;
		if (charged.length !== 1 || offset === (fittedCharges.length === 1)) return [];
		const species = charged[0][0];
		const variant = bothFitted(problem.request, run.index, species);
		const both = compileProblem(variant).problem;
		if (!both) return [];
		const extra = offset ? `${run.id}.initial.${species}` : `${run.id}.timeOffset`;
		const x = Float64Array.from(both.free, (slot) => {
			const j = problem.free.findIndex((f) => f.id === slot.id);
			if (j >= 0) return best.x[j];
			return Number.isFinite(slot.value) ? slot.value : 0;
		});
		const model = watched(both, like);
		const jacobian = new Float64Array(model.m * model.p);
		if (!model.evaluatePredictions(x, new Float64Array(model.m), jacobian)) return [];
		const { singularValues } = covarianceFromJacobian(jacobian, model.m, model.p);
		if (singularValues[singularValues.length - 1] > 1e-6 * singularValues[0]) return [];
		const fitted = offset ? `${run.id}.timeOffset` : `${run.id}.initial.${species}`;
		return [
			{
				code: 'offset-or-charge',
				level: 'caution' as const,
				message: `Run ${run.id}: ${offset ? 'a time offset' : 'another charge'} was fitted, but ${offset ? 'a different charge' : 'a time offset (quench lag)'} explains these data exactly as well: ${fitted} and ${extra} cannot be told apart. State the charge of ${species} from the weighing, or assay a sample taken before the reaction began.`,
				parameters: [fitted],
				runs: [run.id]
			}
		];
	});
}

function bothFitted(request: FitRequest, index: number, species: string): FitRequest {
	const id = runId(request.runs[index], index);
	const names = new Set([`${id}.timeOffset`, `${id}.initial.${species}`]);
	return {
		...request,
		runs: request.runs.map((run, i) => {
			if (i !== index) return run;
			const amount = run.initial[species];
			return {
				...run,
				initial: {
					...run.initial,
					[species]: isFitted(amount) ? amount : { fit: true as const, guess: amount }
				},
				timeOffset:
					run.timeOffset && isFitted(run.timeOffset)
						? run.timeOffset
						: { fit: true as const, guess: run.timeOffset ?? { value: 0, unit: run.timeUnit } }
			};
		}),
		options: {
			...request.options,
			useTimeZeroRow: false,
			fixed: request.options.fixed.filter((f) => !names.has(f)),
			tied: request.options.tied.filter((t) => !names.has(t.parameter))
		}
	};
}

/** Units of AICc by which a time offset has to improve a fit before it is proposed. */
const CLEARLY_BETTER = 10;

/**
 * Where the residuals show a pattern and no offset was fitted: would a time offset (quench lag) explain it?
 * Only a proposal; the reported fit is not changed.
 */
export function quenchLag({ problem, model, best, report }: FindingsInput): FitFinding[] {
	const patterned =
		(report.runsTest !== null && report.runsTest.p < 0.1) ||
		(report.lackOfFit !== null && report.lackOfFit.p < 0.05);
	if (!patterned || report.aicc === null || problem.runs.some((r) => r.offset.terms.length > 0)) return [];
	const request: FitRequest = {
		...problem.request,
		runs: problem.request.runs.map((run) => ({
			...run,
			timeOffset: { fit: true as const, guess: { value: 0, unit: run.timeUnit } }
		})),
		options: { ...problem.request.options, useTimeZeroRow: problem.request.options.useTimeZeroRow ?? false }
	};
	const variant = compileProblem(request).problem;
	if (!variant || variant.counted !== problem.counted) return [];
	const start = Float64Array.from(variant.free, (slot) => {
		const j = problem.free.findIndex((f) => f.id === slot.id);
		return j >= 0 ? best.x[j] : 0;
	});
	const { minima } = searchMinima(watched(variant, model), searchBox(variant), [start]);
	const other = minima.length ? aicc(variant.counted, variant.free.length, minima[0].result.ssr) : null;
	if (other === null || other > report.aicc - CLEARLY_BETTER) return [];
	const { x } = minima[0].result;
	const words = variant.free.flatMap((slot, j) => {
		if (slot.kind === 'offset') return [`${slot.run} ${figure(toReported(slot, x[j]))} ${slot.unit}`];
		return [];
	});
	const constants = variant.free.flatMap((slot, j) =>
		slot.kind === 'rate' ? [`${slot.id} ${withUnit(toReported(slot, Math.exp(x[j])), slot.unit)}`] : []
	);
	return [
		{
			code: 'time-offset-explains',
			level: 'caution',
			message: `A time offset (samples that react on until quenched, or a clock started late) would describe the data much better (AICc lower by ${figure(report.aicc - other)}): ${words.join(', ')}, with ${constants.join(', ')}. A different charge can look the same. Ask how time zero was set, and let the offset be fitted if that is what happened.`
		}
	];
}
