/**
 * Responses measured together: the rows of a fit in which every channel has a value, for the determinant criterion.
 */
import type { FitFinding } from '../../schemas/fit';
import { dependenciesOf, type Dependencies } from './dependencies';
import type { KineticProblem } from './problem';

export interface ResponseRows {
	/** Channel ids, in the order of the first run. */
	responses: string[];
	/** rows[u][i]: position among the problem's points of response i in row u. */
	rows: number[][];
	/** Rows that lack a response or have one below or above a limit. */
	leftOut: number;
}

/** Channels of a run that have at least one point. */
function measured(problem: KineticProblem, run: number): string[] {
	const { channels, points } = problem.runs[run];
	return channels.flatMap(({ id }, c) => (points.some((p) => p.channel === c) ? [id] : []));
}

export function responseRows(problem: KineticProblem): ResponseRows {
	const responses = measured(problem, 0);
	const rows = new Map<string, (number | undefined)[]>();
	problem.points.forEach((point, i) => {
		const place = responses.indexOf(problem.runs[point.run].channels[point.channel].id);
		if (place < 0) return;
		const key = `${point.run}|${point.index}`;
		const row = rows.get(key) ?? new Array<number | undefined>(responses.length).fill(undefined);
		if (point.kind === 'value') row[place] = i;
		rows.set(key, row);
	});
	const complete = [...rows.values()].filter((row): row is number[] => row.every((i) => i !== undefined));
	return { responses, rows: complete, leftOut: rows.size - complete.length };
}

/** Combinations of the responses that hold but for rounding in the recorded values. */
export function responseDependencies(
	problem: KineticProblem,
	{ rows, responses }: ResponseRows
): Dependencies {
	const values = rows.map((row) => row.map((i) => problem.points[i].observed));
	return dependenciesOf(values, responses);
}

/** What stands in the way of the criterion, or should be known of it, before any search. */
export function responseIssues(problem: KineticProblem): FitFinding[] {
	const { responses, rows, leftOut } = responseRows(problem);
	const differing = problem.runs.filter((_, r) => measured(problem, r).join('|') !== responses.join('|'));
	if (differing.length > 0 || responses.length < 2)
		return [
			{
				code: 'determinant-channels',
				level: 'stop',
				message: differing.length
					? `The determinant criterion needs the same channels in every run, in the same order; run ${differing.map((r) => r.id).join(', ')} has others than run ${problem.runs[0].id} (${responses.join(', ')}). Leave channels out, or fit by least squares.`
					: `The determinant criterion is for two or more responses measured in the same samples; found ${responses.join(', ') || 'none'}. Fit by least squares.`,
				runs: differing.map((r) => r.id)
			}
		];
	const { independent, weights, words } = responseDependencies(problem, { responses, rows, leftOut });
	const p = problem.free.length;
	// A combination of r responses has r − 1 free weights: with p constants it could follow fewer rows exactly, and |ZᵀZ| would be zero.
	if (rows.length < p + independent.length)
		return [
			{
				code: 'determinant-too-few',
				level: 'stop',
				message: `${rows.length} complete row${rows.length === 1 ? '' : 's'} cannot carry the determinant criterion with ${p} parameters and ${independent.length} independent responses: at least ${p + independent.length} are needed. Fit by least squares, fix parameters, or leave channels out.`
			}
		];
	const issues: FitFinding[] = [];
	if (weights.length > 0)
		issues.push({
			code: 'responses-dependent',
			level: 'note',
			message: `${words.join('; ')}. Such a combination has no error of its own and is taken out: ${independent.length} independent combination${independent.length === 1 ? '' : 's'} of ${responses.length} responses count.`
		});
	if (leftOut > 0)
		issues.push({
			code: 'determinant-rows',
			level: 'note',
			message: `${leftOut} row${leftOut === 1 ? '' : 's'} without a value of every channel ${leftOut === 1 ? 'is' : 'are'} left out: the determinant criterion compares the channels row by row. ${rows.length} rows count.`
		});
	if (problem.request.options.weighting.model !== 'constant' || problem.request.options.weighting.perChannel)
		issues.push({
			code: 'determinant-weights',
			level: 'note',
			message:
				'The determinant criterion finds the errors of the channels and how they go together from the residuals; the error model stated for the values is not used.'
		});
	return issues;
}
