import type { FitReport, FitRequest } from '$lib/schemas/fit';

const UNDETERMINED = /not-identifiable|undetermined|not-determined|open-profile/;

/** Parameters that the data do not fix: no standard error, or an interval open to one side. */
export function undetermined(report: FitReport): string[] {
	const named = report.findings.filter((f) => UNDETERMINED.test(f.code)).flatMap((f) => f.parameters ?? []);
	const open = report.parameters
		.filter((p) => p.state === 'fitted')
		.filter((p) => p.standardError === null || (p.profileCi95 !== null && p.profileCi95.includes(null)));
	return [...new Set([...named, ...open.map((p) => p.id)])];
}

/** Unit of s, where every column has the same; under weights other than constant ones s is a bare number. */
function unitOf(request: FitRequest | undefined): string {
	if (request?.options.weighting.model !== 'constant') return '';
	const units = new Set(request?.runs.flatMap((run) => run.channels.map((c) => c.unit)));
	return units.size === 1 ? ` ${[...units][0]}` : '';
}

/** One line on a fit for the station strip: "s 4.1 mmol/L, all determined". */
export function fitLine(report: FitReport, request?: FitRequest): string {
	if (report.status !== 'converged') return `last fit ${report.status}`;
	const s = report.residualStandardError;
	const size =
		report.criterion === 'determinant'
			? 'determinant criterion'
			: s === null
				? 'no degrees of freedom'
				: `s ${Number(s.toPrecision(2))}${unitOf(request)}`;
	if (report.findings.some((f) => f.level === 'stop')) return `${size}, fails its checks`;
	const open = undetermined(report).length;
	const state = open === 0 ? 'all determined' : `${open} not determined`;
	return `${size}, ${state}`;
}
