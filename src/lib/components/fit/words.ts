/** The sentence at the top of a fit, in words. */
import type { FitParameter, FitReport } from '$lib/schemas/fit';
import type { SchemeContent } from '$lib/schemas/scheme';
import { inPlainWords, parameterName, plainName } from '$lib/kinetics/parameter-names';

export {
	inPlainWords,
	parameterName,
	plainName,
	stepWords,
	type ParameterName
} from '$lib/kinetics/parameter-names';

const NUMBERS = ['no', 'one', 'two', 'three', 'four', 'five', 'six', 'seven', 'eight', 'nine', 'ten'];
const numberWord = (n: number): string => NUMBERS[n] ?? String(n);

/** Fitted constants of the scheme whose interval is open at an end, or that rest on a bound. */
export function undetermined(report: FitReport): FitParameter[] {
	return report.parameters.filter(
		(p) =>
			p.state === 'at bound' ||
			(p.state === 'fitted' && (p.standardError === null || p.profileCi95?.includes(null) === true))
	);
}

const list = (names: string[]): string =>
	names.length < 2 ? (names[0] ?? '') : `${names.slice(0, -1).join(', ')} and ${names.at(-1)}`;

/** The sentence at the top of a fit: bad news first, and never more than the data say. */
export function headline(
	report: FitReport,
	scheme: SchemeContent,
	runNames: Record<string, string> = {}
): string {
	if (report.status === 'failed') return `The fit failed: ${report.message}`;
	const stop = report.findings.find((f) => f.level === 'stop');
	if (stop) return inPlainWords(stop.message, scheme, runNames);
	if (report.status === 'not converged')
		return 'The search ended before it settled; do not use these constants yet.';
	const fitted = report.parameters.filter((p) => p.state === 'fitted' || p.state === 'at bound');
	const open = undetermined(report).map((p) => plainName(parameterName(p.id, scheme, runNames)));
	if (open.length) return `${list(open)} ${open.length === 1 ? 'is' : 'are'} not determined by these data.`;
	if (fitted.length === 1) return 'The one fitted constant is determined by these data.';
	if (fitted.length === 2) return 'Both fitted constants are determined by these data.';
	return `All ${numberWord(fitted.length)} fitted constants are determined by these data.`;
}

/** Name of the run to which a parameter is local, where several share one symbol; null for what all runs share. */
export function localRun(
	report: Pick<FitReport, 'parameters'>,
	id: string,
	runNames: Record<string, string> = {}
): string | null {
	const run = report.parameters.find((p) => p.id === id)?.local?.run;
	return run === undefined ? null : (runNames[run] ?? run);
}

/** What was fitted, each symbol once: "k₁ of each run, k₂ and E₂". */
export function fittedNames(
	report: Pick<FitReport, 'parameters' | 'fittedIds'>,
	scheme: SchemeContent,
	runNames: Record<string, string> = {}
): string[] {
	const names = report.fittedIds.map((id) => {
		const name = plainName(parameterName(id, scheme, runNames));
		return localRun(report, id) === null ? name : `${name} of each run`;
	});
	return [...new Set(names)];
}
