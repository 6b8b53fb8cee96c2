import type { FitReport } from '$lib/schemas/fit';

export interface ReviewerRow {
	label: string;
	value: string;
	/** What a reviewer would ask. */
	ask: string;
}

const minus = (text: string): string => text.replace(/-/g, '−');
const fixed = (x: number, digits: number): string => minus(x.toFixed(digits));
const probability = (p: number): string => (p < 0.001 ? 'p below 0.001' : `p ${p.toFixed(p < 0.1 ? 3 : 2)}`);

function residuals(report: FitReport): ReviewerRow {
	const value = report.runsTest
		? `${report.runsTest.p < 0.05 ? 'signs follow each other' : 'no pattern of signs found'} (runs test ${probability(report.runsTest.p)})`
		: 'too few points to look for a pattern';
	return {
		label: 'Residuals',
		value,
		ask: 'Do the residuals scatter, or do they lean the same way for a stretch of time?'
	};
}

function lackOfFit(report: FitReport): ReviewerRow {
	const l = report.lackOfFit;
	return {
		label: 'Lack of fit',
		value: l
			? `F ${l.f.toFixed(1)} against replicates (critical ${l.critical.toFixed(1)})`
			: 'cannot be tested: no replicate samples',
		ask: 'Is the scheme off by more than the scatter between replicate samples?'
	};
}

function massBalance(report: FitReport): ReviewerRow {
	const values = report.massBalance.flatMap((m) => m.percent.map((p) => p.value));
	const slopes = report.massBalance.flatMap((m) =>
		m.slopeCi95 && m.slopePerHour !== null ? [{ run: m.run, slope: m.slopePerHour, ci: m.slopeCi95 }] : []
	);
	const drifting = slopes.find((s) => s.ci[0] > 0 || s.ci[1] < 0);
	const range = values.length
		? `${fixed(Math.min(...values), 1)} to ${fixed(Math.max(...values), 1)} %`
		: 'not assessed: not every species is assayed';
	return {
		label: 'Mass balance',
		value: drifting ? `${range}; drifts by ${fixed(drifting.slope, 2)} % an hour in ${drifting.run}` : range,
		ask: 'Does everything that was charged turn up in the assays, from first sample to last?'
	};
}

function search(report: FitReport): ReviewerRow {
	const others = report.alternatives.length;
	return {
		label: 'Search',
		value: `${report.startsConverged} of ${report.startsRun} starts settled, ${others > 1 ? `${others} distinct minima` : 'one minimum'}`,
		ask: 'Could another set of constants fit as well?'
	};
}

/** The rows of "Would a reviewer believe it?", each with the question behind it. */
export function reviewerRows(report: FitReport): ReviewerRow[] {
	const large = report.residuals.filter((r) => r.studentised !== null && Math.abs(r.studentised) > 3).length;
	return [
		residuals(report),
		lackOfFit(report),
		massBalance(report),
		search(report),
		{
			label: 'Large residuals',
			value: large ? `${large} beyond 3 (studentised), marked in the chart` : 'none beyond 3 (studentised)',
			ask: 'Is one sample far from all others, and has somebody looked into why?'
		}
	];
}
