/**
 * The figures at the estimates, in every draw, and to first order.
 *
 *     first order: figure ± t √(gᵀ C g),   g_j = ∂figure/∂x_j by central differences of 1 % of a standard error
 *
 * The figures are roots found to full accuracy, so that the differences are good to some six digits; the interval only checks
 * the draws. Source: G. A. F. Seber and C. J. Wild, Nonlinear Regression (1989), 5.1.
 */
import { studentQuantile } from '../fit/distributions';
import type { Network } from '../types';
import { answer, rowLength, type Answers, type Question } from './answers';
import { jointDraws, jointFactor, valueAt } from './draws';
import { copyNetwork, type FittedNetwork } from './parameters';

export interface Propagated {
	nominal: Answers;
	/** Draw by draw, rowLength numbers each; empty where no interval can be given. */
	rows: Float64Array[];
	/** Draws whose constants could not be used. */
	leftOut: number;
	/** [low, high] per place of the row; null where it cannot be had. */
	firstOrder: ([number, number] | null)[];
}

export interface PropagateOptions {
	draws: number;
	seed: number;
	confidence: number;
	degreesOfFreedom: number;
	covariance: readonly (readonly number[])[];
}

/** `rows` and `firstOrder` stay empty when nothing was fitted or a constant that matters is not determined. */
export function propagate(fitted: FittedNetwork, question: Question, options: PropagateOptions): Propagated {
	const nominal = answer(fitted.network, question);
	const empty = Array.from({ length: rowLength(question) }, () => null);
	const none: Propagated = { nominal, rows: [], leftOut: 0, firstOrder: empty };
	if (fitted.varied.length === 0 || fitted.undetermined.length > 0) return none;
	const factor = jointFactor(fitted.varied, options.covariance);
	if (!factor) return none;
	const network = copyNetwork(fitted.network);
	const draws = jointDraws(factor, options.degreesOfFreedom, options.draws, options.seed);
	const rows: Float64Array[] = [];
	for (let d = 0; d < draws.count; d++) {
		const at = draws.deviations.subarray(d * draws.parameters, (d + 1) * draws.parameters);
		const row = rowAt(fitted, network, question, at, nominal);
		if (row) rows.push(row);
	}
	return {
		nominal,
		rows,
		leftOut: draws.count - rows.length,
		firstOrder: firstOrder(fitted, network, question, nominal, options)
	};
}

function rowAt(
	fitted: FittedNetwork,
	network: Network,
	question: Question,
	deviation: Float64Array,
	nominal: Answers
): Float64Array | null {
	const values = Float64Array.from(fitted.varied, (parameter, j) => valueAt(parameter, deviation[j]));
	if (!values.every(Number.isFinite)) return null;
	fitted.apply(network, values);
	return answer(network, question, nominal.main).row;
}

function firstOrder(
	fitted: FittedNetwork,
	network: Network,
	question: Question,
	nominal: Answers,
	options: PropagateOptions
): ([number, number] | null)[] {
	const { varied } = fitted;
	const length = nominal.row.length;
	const gradients: Float64Array[] = [];
	const deviation = new Float64Array(varied.length);
	for (let j = 0; j < varied.length; j++) {
		const step = 0.01 * Math.min(varied[j].error, varied[j].scale === 'ln' ? 1 : Infinity);
		const at = (sign: 1 | -1): Float64Array | null => {
			deviation.fill(0);
			deviation[j] = sign * step;
			return rowAt(fitted, network, question, deviation, nominal);
		};
		const above = at(1);
		const below = at(-1);
		gradients.push(
			Float64Array.from({ length }, (_, k) => (above && below ? (above[k] - below[k]) / (2 * step) : NaN))
		);
	}
	const degrees = options.degreesOfFreedom > 0 ? options.degreesOfFreedom : Infinity;
	const t = studentQuantile(0.5 + options.confidence / 2, degrees);
	return Array.from({ length }, (_, k) => {
		let variance = 0;
		varied.forEach((a, i) =>
			varied.forEach((b, j) => {
				variance += gradients[i][k] * gradients[j][k] * options.covariance[a.fitted][b.fitted];
			})
		);
		const half = t * Math.sqrt(variance);
		return Number.isFinite(half) ? [nominal.row[k] - half, nominal.row[k] + half] : null;
	});
}
