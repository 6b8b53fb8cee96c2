/**
 * Does the scheme describe the data at all? Lack of fit, patterns in the residuals, large residuals, signs of self-acceleration.
 */
import type { FitFinding } from '../../schemas/fit';
import type { FindingsInput } from './findings';
import { duration, figure, plural } from './words';

export function fitQualityFindings(input: FindingsInput): FitFinding[] {
	const failures = [...lackOfFit(input), ...pattern(input)];
	return [...failures, ...acceleration(input, failures.length > 0), ...largeResiduals(input)];
}

const CAUSES =
	'Possible causes: a missing or reversible step, a rate that depends on conversion (autocatalysis, inhibition, a dying catalyst), a rate that depends on the charge, a temperature that was not constant, or an assay fault.';

function lackOfFit({ report }: FindingsInput): FitFinding[] {
	const test = report.lackOfFit;
	if (!test)
		return [
			{
				code: 'lack-of-fit-untested',
				level: 'note',
				message:
					'Lack of fit cannot be tested: there are no separate samples at equal times under equal conditions.'
			}
		];
	if (test.p >= 0.05) return [];
	return [
		{
			code: 'lack-of-fit',
			level: test.p < 0.01 ? 'stop' : 'caution',
			message: `The scheme does not describe the data: its misfit is larger than the scatter of separate samples (F = ${figure(test.f)} on ${test.df1} and ${test.df2} degrees of freedom, critical value ${figure(test.critical)}). ${CAUSES}`
		}
	];
}

function pattern({ report }: FindingsInput): FitFinding[] {
	const test = report.runsTest;
	if (!test || test.p >= 0.05 || test.z > 0) return [];
	return [
		{
			code: 'residual-pattern',
			level: test.p < 0.005 && (report.lag1 ?? 0) > 0.5 && !report.lackOfFit ? 'stop' : 'caution',
			message: `The residuals are not scattered but come in runs of one sign (runs test p = ${figure(test.p, 2)}): the curve is systematically off. ${CAUSES}`
		}
	];
}

/** Observed above the curve early and below it late, for a species that is charged: slower at first, faster later. */
function acceleration({ report, problem }: FindingsInput, failed: boolean): FitFinding[] {
	if (!failed) return [];
	const runs = problem.runs.filter((run) =>
		run.channels.some((channel) => {
			if (channel.species.length !== 1 || !isCharged(run.charge[channel.species[0]])) return false;
			return laggingThenRushing(meanResiduals(report, run.id, channel.id));
		})
	);
	if (!runs.length) return [];
	const ids = runs.map((r) => r.id);
	return [
		{
			code: 'acceleration',
			level: 'caution',
			message: `In run ${ids.join(', ')} the starting material falls more slowly than the curve at first and faster later. Autocatalysis, an induction period or self-heating would look like this. A second run with some product added at the start, and one with another charge, would tell. A reaction that accelerates can release its heat faster than a first-order curve says; this tool does not assess that: take it to your process-safety people before scaling up.`,
			runs: ids
		}
	];
}

const isCharged = (charge: { constant: number; terms: unknown[] }) =>
	charge.constant > 0 || charge.terms.length > 0;

function meanResiduals(report: FindingsInput['report'], run: string, channel: string): number[] {
	const byTime = new Map<number, number[]>();
	for (const r of report.residuals) {
		if (r.run !== run || r.channel !== channel || r.residual === null) continue;
		byTime.set(r.time, [...(byTime.get(r.time) ?? []), r.residual]);
	}
	return [...byTime]
		.sort((a, b) => a[0] - b[0])
		.map(([, list]) => list.reduce((a, b) => a + b, 0) / list.length);
}

function laggingThenRushing(residuals: number[]): boolean {
	const n = residuals.length;
	if (n < 6) return false;
	const signs = residuals.map((r) => r > 0);
	const changes = signs.slice(1).filter((s, i) => s !== signs[i]).length;
	const half = Math.floor(n / 2);
	const plus = signs.slice(0, half).filter(Boolean).length;
	const minus = signs.slice(n - half).filter((s) => !s).length;
	return changes <= 2 && plus >= half - 1 && minus >= half - 1;
}

function largeResiduals({ report, problem }: FindingsInput): FitFinding[] {
	const large = report.residuals.filter((r) => r.studentised !== null && Math.abs(r.studentised) > 3);
	if (!large.length) return [];
	const rows = new Map<string, typeof large>();
	for (const r of report.residuals) {
		if (r.studentised === null || Math.abs(r.studentised) <= 2.5) continue;
		const key = `${r.run}|${r.index}`;
		rows.set(key, [...(rows.get(key) ?? []), r]);
	}
	const suspects = [...rows.values()].filter(
		(list) => list.length > 1 && list.some((r) => Math.abs(r.studentised!) > 3)
	);
	const findings: FitFinding[] = suspects.map((list) => ({
		code: 'row-suspect',
		level: 'caution' as const,
		message: `${list.map((r) => r.channel).join(', ')} all lie far off the curves in one row of run ${list[0].run} (time ${figure(list[0].time)} ${list[0].timeUnit}): look for a mistyped time or a swapped sample. Nothing was left out.`,
		runs: [list[0].run]
	}));
	const single = large.filter(
		(r) => !suspects.some((list) => list[0].run === r.run && list[0].index === r.index)
	);
	if (single.length)
		findings.push({
			code: 'residual-large',
			level: 'caution',
			message: `${plural(single.length, 'value lies', 'values lie')} more than three studentised residuals off: ${single
				.slice(0, 4)
				.map(
					(r) =>
						`${r.channel} at ${duration(r.time * timeFactor(problem, r.run), r.timeUnit as 'h')} in ${r.run}`
				)
				.join(', ')}${single.length > 4 ? ', …' : ''}. Nothing was left out.`,
			runs: [...new Set(single.map((r) => r.run))]
		});
	return findings;
}

const timeFactor = (problem: FindingsInput['problem'], run: string) =>
	problem.runs.find((r) => r.id === run)?.timeFactor ?? 1;
