import type { FitReport } from '$lib/schemas/fit';
import { significant } from '$lib/client/numbers';
import { isAmbiguous } from './solutions';
import { undetermined } from './words';

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
	const lag = report.lag1 === null ? '' : `, lag-1 autocorrelation ${fixed(report.lag1, 2)}`;
	const value = report.runsTest
		? `${report.runsTest.p < 0.05 ? 'signs follow each other' : 'no pattern of signs found'} (runs test ${probability(report.runsTest.p)}${lag})`
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
			: report.criterion === 'determinant'
				? 'cannot be tested by the determinant criterion'
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
		value: `${report.startsConverged} of ${report.startsRun} starts settled, ${others > 0 ? `${others + 1} distinct minima` : 'one minimum'}`,
		ask: 'Could another set of constants fit as well?'
	};
}

function determined(report: FitReport): ReviewerRow {
	const open = undetermined(report).length;
	const fitted = report.fittedIds.length;
	const values = report.singularValues;
	const spread = values.length > 1 ? values[0] / values[values.length - 1] : null;
	const size =
		spread !== null && Number.isFinite(spread)
			? ` (largest to smallest singular value ${significant(spread, 2)})`
			: '';
	const count = open ? `${fitted - open} of ${fitted}` : fitted === 1 ? 'the one' : `all ${fitted}`;
	return {
		label: 'Determined',
		value: isAmbiguous(report)
			? `no: ${report.alternatives.length + 1} solutions, some fit alike`
			: `${count} fitted ${fitted === 1 ? 'constant' : 'constants'}${size}`,
		ask: 'Does each constant have a limit on both sides, or could it be anything?'
	};
}

function confirmed(count: ConfirmedCount | null): ReviewerRow {
	return {
		label: 'Confirmation',
		value: count
			? `${count.inside} of ${count.counted} values of ${count.runName} inside the 95 % prediction band`
			: 'not held against an unused run',
		ask: 'Has it predicted anything that it had not seen?'
	};
}

export interface ConfirmedCount {
	inside: number;
	counted: number;
	runName: string;
}

/** The rows of "Would a reviewer believe it?", each with the question behind it. */
export function reviewerRows(report: FitReport, confirmation: ConfirmedCount | null = null): ReviewerRow[] {
	const large = report.residuals.filter((r) => r.studentised !== null && Math.abs(r.studentised) > 3).length;
	return [
		residuals(report),
		lackOfFit(report),
		massBalance(report),
		determined(report),
		search(report),
		{
			label: 'Large residuals',
			value: !report.residuals.some((r) => r.studentised !== null)
				? 'not studentised'
				: large
					? `${large} beyond 3 (studentised), marked in the chart`
					: 'none beyond 3 (studentised)',
			ask: 'Is one sample far from all others, and has somebody looked into why?'
		},
		confirmed(confirmation)
	];
}
