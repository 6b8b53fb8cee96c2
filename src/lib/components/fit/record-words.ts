/** What is on record of a fit, in sentences: error model, rows at time zero, search, what was eliminated. */
import { plain, unitText } from '$lib/client/numbers';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import { isFitted } from '$lib/schemas/quantity';
import { parameterName, plainName } from './words';

const MODELS: Record<FitRequest['options']['weighting']['model'], string> = {
	constant: 'constant: the same standard deviation for every value',
	proportional: 'proportional: standard deviation in proportion to the value',
	combined: 'combined: variance a² + (b·y)²',
	replicates: 'standard deviations from replicate samples'
};

/** With the parts of a combined model, column by column. */
export function errorModelWords({ options, runs }: FitRequest): string {
	if (options.criterion === 'determinant')
		return 'errors of the columns go together (determinant criterion); weights are not used';
	const { model, a, b, perChannel } = options.weighting;
	if (model !== 'combined') return MODELS[model];
	const units = new Map(runs.flatMap((r) => r.channels).map((c) => [c.id, unitText(c.unit)]));
	const part = (of: string, first: number, second: number) =>
		`${of}a ${plain(first)}${units.get(of.replace(/: $/, '')) ? ` ${units.get(of.replace(/: $/, ''))}` : ''}, b ${plain(100 * second)} %`;
	const parts = Object.entries(perChannel ?? {}).map(([id, p]) => part(`${id}: `, p.a, p.b));
	if (a !== undefined) parts.unshift(part('', a, b ?? 0));
	return [MODELS.combined, ...parts].join('; ');
}

/** How many values counted, and what became of rows at time zero and of values at a limit. */
export function countWords(report: FitReport, request: FitRequest): string {
	const zero = request.runs.reduce((n, run) => n + run.timepoints.filter((p) => p.time === 0).length, 0);
	const { useTimeZeroRow } = request.options;
	const fitted = request.runs.some((run) => Object.values(run.initial).some(isFitted));
	const counted = useTimeZeroRow ?? fitted;
	const rows = zero === 1 ? 'the row at time zero' : `${zero} rows at time zero`;
	return [
		`${report.pointsUsed} values`,
		...(report.pointsCensored
			? [`${report.pointsCensored} at a limit, which count where the curve crosses it`]
			: []),
		...(zero ? [`${rows} ${counted ? 'counted' : 'not counted'}`] : []),
		`${report.degreesOfFreedom} degrees of freedom`
	].join('; ');
}

/** One line on what the search did not have to search for; null where nothing was eliminated and nothing is to be said. */
export function eliminatedWords(
	report: FitReport,
	request: FitRequest,
	runNames: Record<string, string>
): string | null {
	const ids = report.eliminated ?? [];
	if (ids.length === 0) return report.eliminationNote ?? null;
	const names = ids.map((id) => {
		const name = parameterName(id, request, runNames);
		return name.of ? `${plainName(name)} (${name.of})` : plainName(name);
	});
	const note = report.eliminationNote ? ` ${report.eliminationNote}` : '';
	return `${names.join(', ')} ${ids.length === 1 ? 'enters' : 'enter'} linearly and ${ids.length === 1 ? 'was' : 'were'} eliminated from the search (variable projection, Golub & Pereyra 1973); estimates and intervals are those of the full problem.${note}`;
}

/** Status, starts, effort, and what rests on a bound. */
export function searchWords(
	report: FitReport,
	request: FitRequest,
	runNames: Record<string, string>
): string {
	const bound = report.parameters
		.filter((p) => p.state === 'at bound')
		.map((p) => plainName(parameterName(p.id, request, runNames)));
	const gradient = report.optimality.toExponential(1).replace('-', '−');
	return [
		report.status,
		`${report.startsConverged} of ${report.startsRun} starts settled`,
		`seed ${report.seed}`,
		`${report.evaluations} evaluations`,
		`gradient at the end ${gradient}`,
		bound.length ? `at a bound: ${bound.join(', ')}` : 'nothing at a bound'
	].join(', ');
}
