/** The distinct minima of a search as rows to compare, and the sample that would decide between those that fit alike. */
import type { FitFinding, FitReport } from '$lib/schemas/fit';
import type { SchemeContent } from '$lib/schemas/scheme';
import { inPlainWords } from './words';

export interface Solution {
	values: Record<string, number>;
	weightedSsr: number;
	deltaAicc: number;
	/** Null where the report does not say. */
	starts: number | null;
}

/** The reported minimum first, then the others by misfit. */
export function solutions(report: FitReport): Solution[] {
	const reported = report.parameters
		.filter((p) => report.fittedIds.includes(p.id))
		.map((p) => [p.id, p.estimate] as const);
	const elsewhere = report.alternatives.reduce((sum, a) => sum + a.starts, 0);
	const here = report.startsConverged - elsewhere;
	return [
		{
			values: Object.fromEntries(reported),
			weightedSsr: report.weightedSsr,
			deltaAicc: 0,
			starts: here > 0 ? here : null
		},
		...report.alternatives.map(({ parameters, weightedSsr, deltaAicc, starts }) => ({
			values: parameters,
			weightedSsr,
			deltaAicc,
			starts
		}))
	];
}

/** The engine's sentence on the deciding sample; null where there is nothing to decide. */
export function decidingWords(
	report: FitReport,
	scheme: SchemeContent,
	runNames: Record<string, string>
): string | null {
	const message = report.findings.find((f) => f.code === 'ambiguous-solutions')?.message;
	const sentence = /One sample would decide:.*$/.exec(message ?? '')?.[0];
	return sentence ? inPlainWords(sentence, scheme, runNames) : null;
}

/** A caution about heat that must stand beside the failure that it explains. */
export const isDanger = (finding: FitFinding): boolean =>
	finding.code === 'acceleration' && finding.level !== 'stop';

/** Whether several solutions fit alike, so that none is the answer. */
export const isAmbiguous = (report: FitReport): boolean =>
	report.findings.some((f) => f.code === 'ambiguous-solutions');
