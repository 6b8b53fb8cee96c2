/**
 * Every figure of the window station for one set of constants, as one row of numbers, so that it can be repeated for each draw.
 *
 * | place in the row | figure |
 * | --- | --- |
 * | 5 per species asked for | time of maximum, height, first and last time within 1 %, height at the end of the curve |
 * | 2 per criterion | opening and closing of its first span |
 * | 3 | opening, closing and length of the span in which every criterion holds |
 *
 * NaN: there is none. Infinity: without end.
 */
import type { Criterion } from '../criteria';
import { holdIntervalsOn, type HoldSpan, type HoldTimes } from '../criteria-hold';
import { maximumOn, type Maximum } from '../extrema';
import { linearSystem } from '../linear-system';
import { rateConstants } from '../rate-laws';
import { solve } from '../solve';
import { trackOf } from '../track';
import type { Conditions, Network, Solution } from '../types';

export interface Question {
	conditions: Conditions;
	/** mol/L, in species order. */
	charge: Float64Array;
	/** Places of the species whose maximum is wanted. */
	maximaOf: number[];
	criteria: readonly Criterion[];
	horizonS: number;
}

export interface Answers {
	solution: Solution;
	maxima: Maximum[];
	hold: HoldTimes;
	/** The longest span in which every criterion holds, or the one closest to `near`. */
	main: HoldSpan | null;
	row: Float64Array;
}

export const PER_MAXIMUM = 4;
export const PER_CRITERION = 2;

export const rowLength = (question: Question): number =>
	PER_MAXIMUM * question.maximaOf.length + PER_CRITERION * question.criteria.length + 3;

/**
 * @param near span at the estimates: among several spans of a draw the one that overlaps it most is meant
 * @param nominal kinds of maximum at the estimates; a draw whose maximum is of another kind has no such time
 */
export function answer(network: Network, question: Question, near: HoldSpan | null = null): Answers {
	const { charge, conditions, criteria, horizonS, maximaOf } = question;
	const solution = solve(linearSystem(network, rateConstants(network, conditions)), charge);
	const track = trackOf(solution, horizonS);
	const row = new Float64Array(rowLength(question)).fill(NaN);
	const weights = new Float64Array(solution.n);
	const maxima = maximaOf.map((species, m) => {
		weights.fill(0);
		weights[species] = 1;
		const maximum = maximumOn(track, weights);
		const at = m * PER_MAXIMUM;
		row[at + 1] = maximum.value;
		if (maximum.kind === 'at end' || maximum.kind === 'interior') row[at] = maximum.timeS;
		if (maximum.kind === 'interior') {
			row[at + 2] = maximum.withinOnePercent[0];
			row[at + 3] = maximum.withinOnePercent[1];
		} else if (maximum.kind === 'at end') row[at + 2] = maximum.withinOnePercent[0];
		return maximum;
	});
	const hold = holdIntervalsOn(track, criteria);
	hold.perCriterion.forEach(({ spans }, j) => {
		if (spans.length === 0) return;
		const at = PER_MAXIMUM * maxima.length + PER_CRITERION * j;
		[row[at], row[at + 1]] = spans[0];
	});
	const main = criteria.length > 0 ? mainSpan(hold.spans, near) : null;
	if (main) row.set([main.fromS, main.toS, main.toS - main.fromS], row.length - 3);
	return { solution, maxima, hold, main, row };
}

function mainSpan(spans: HoldSpan[], near: HoldSpan | null): HoldSpan | null {
	let best: HoldSpan | null = null;
	let most = -Infinity;
	for (const span of spans) {
		const overlap = near
			? Math.min(span.toS, near.toS, Number.MAX_VALUE) - Math.max(span.fromS, near.fromS)
			: span.toS - span.fromS;
		if (overlap > most) [best, most] = [span, overlap];
	}
	return best;
}
