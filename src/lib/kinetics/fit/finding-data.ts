/**
 * What the data themselves say: mass balance, time offset against charge, area %, excess reagent, temperature range.
 */
import type { FitFinding } from '../../schemas/fit';
import { evaluateLinear } from './affine';
import type { FindingsInput } from './findings';
import { offsetOrCharge, quenchLag } from './offset-charge';
import { duration, figure } from './words';

export function dataFindings(input: FindingsInput): FitFinding[] {
	return [
		...noScatter(input),
		...balance(input),
		...offsets(input),
		...offsetOrCharge(input),
		...quenchLag(input),
		...areaPercent(input),
		...smallExcess(input),
		...referenceOutside(input),
		...replicateKind(input)
	];
}

function noScatter({ problem, best }: FindingsInput): FitFinding[] {
	let size = 0;
	for (const p of problem.points) size += (p.observed / p.sigma) ** 2;
	if (best.ssr > 1e-18 * size) return [];
	return [
		{
			code: 'no-scatter',
			level: 'caution',
			message:
				'The data follow the curves to rounding: they carry no scatter, as measured data would. Intervals mean nothing here; were these values calculated?'
		}
	];
}

function balance({ report, problem }: FindingsInput): FitFinding[] {
	return report.massBalance.flatMap((entry) => {
		const findings: FitFinding[] = [];
		const values = entry.percent.map((p) => p.value);
		const [low, high] = [Math.min(...values), Math.max(...values)];
		const run = problem.runs.find((r) => r.id === entry.run)!;
		const hours = (Math.max(...entry.percent.map((p) => p.time)) * run.timeFactor) / 3600;
		const ci = entry.slopeCi95;
		if (
			entry.slopePerHour !== null &&
			ci &&
			(ci[0] > 0 || ci[1] < 0) &&
			Math.abs(entry.slopePerHour * hours) > 1
		)
			findings.push({
				code: 'mass-balance-trend',
				level: 'caution',
				message: `The mass balance of run ${entry.run} ${entry.slopePerHour > 0 ? 'climbs' : 'falls'} by ${figure(Math.abs(entry.slopePerHour), 2)} % per hour (95 % interval ${figure(ci[0], 2)} to ${figure(ci[1], 2)}): ${entry.slopePerHour > 0 ? 'evaporation or a drifting response' : 'a species that is not assayed, or a loss'}. It is not corrected.`,
				runs: [entry.run]
			});
		if (low < 95 || high > 105)
			findings.push({
				code: 'mass-balance-range',
				level: 'note',
				message: `The mass balance of run ${entry.run} lies between ${low.toFixed(1)} and ${high.toFixed(1)} % of the charge.`,
				runs: [entry.run]
			});
		return findings;
	});
}

function offsets({ problem, best }: FindingsInput): FitFinding[] {
	return problem.runs.flatMap((run) => {
		if (run.offset.terms.length === 0 && run.offset.constant === 0) return [];
		const shift = evaluateLinear(run.offset, best.x);
		const fastest = Math.max(...run.lnRates.map((l) => evaluateLinear(l, best.x)));
		const halfLife = Math.LN2 / Math.exp(fastest);
		if (!(Math.abs(shift) > 0.05 * halfLife)) return [];
		return [
			{
				code: 'time-offset',
				level: 'caution' as const,
				message: `Run ${run.id}: the time offset of ${duration(shift, run.timeUnit)} is ${figure((100 * Math.abs(shift)) / halfLife, 2)} % of the shortest half-life. ${shift > 0 ? 'Samples reacted longer than recorded (quench lag), or the clock started late.' : 'The reaction began after the recorded time zero.'}`,
				runs: [run.id]
			}
		];
	});
}

function areaPercent({ problem }: FindingsInput): FitFinding[] {
	const runs = problem.runs.filter((r) => r.points.some((p) => r.channels[p.channel].areaPercent));
	if (!runs.length) return [];
	const corrected = runs.every((r) =>
		r.channels.some((c) => c.areaPercent && (c.lnResponse.constant !== 0 || c.lnResponse.terms.length > 0))
	);
	return [
		{
			code: 'area-percent',
			level: corrected ? 'note' : 'caution',
			message: corrected
				? 'Area % is fitted with the response factors given. It always adds to 100 and says nothing of the mass balance.'
				: 'Area % is fitted with response factor 1 for every species. If they differ, the constants are biased: give relative response factors. Area % says nothing of the mass balance.',
			runs: runs.map((r) => r.id)
		}
	];
}

function smallExcess({ problem, best }: FindingsInput): FitFinding[] {
	return problem.runs.flatMap((run) => {
		const given = problem.request.runs[run.index];
		const charge = Math.max(0, ...run.charge.map((c) => evaluateLinear(c, best.x)));
		return Object.entries(given.excess).flatMap(([species, q]) => {
			const used = problem.network.steps.some((s) =>
				[s.forward, ...(s.reverse && s.reverse.form !== 'equilibrium' ? [s.reverse] : [])].some((l) =>
					l.excess.some((e) => e.species === species && e.order !== 0)
				)
			);
			const factor = /^mmol/.test(q.unit) ? 1e-3 : 1;
			const equivalents = (q.value * factor) / charge;
			if (!used || !(equivalents > 0) || equivalents >= 10 || !/mol/.test(q.unit)) return [];
			return [
				{
					code: 'excess-small',
					level: 'caution' as const,
					message: `${species} is in ${figure(equivalents, 2)}-fold excess in run ${run.id}: below ten equivalents its concentration falls noticeably, and the pseudo-first-order constant reads low.`,
					runs: [run.id]
				}
			];
		});
	});
}

function referenceOutside({ problem, report }: FindingsInput): FitFinding[] {
	if (!problem.free.some((s) => s.kind === 'energy')) return [];
	const reference = problem.network.referenceTemperatureK - 273.15;
	const [low, high] = report.studied.temperatureC;
	if (reference >= low - 1e-6 && reference <= high + 1e-6) return [];
	const centre =
		1 / (problem.runs.reduce((a, r) => a + 1 / r.temperatureK, 0) / problem.runs.length) - 273.15;
	return [
		{
			code: 'reference-outside',
			level: 'caution',
			message: `The reference temperature (${reference.toFixed(1)} °C) lies outside the studied range: constants there are extrapolated, and each is strongly correlated with its energy. ${centre.toFixed(1)} °C would separate them.`
		}
	];
}

function replicateKind({ problem, report }: FindingsInput): FitFinding[] {
	if (!report.lackOfFit) return [];
	const open = problem.runs.filter((r) => problem.request.runs[r.index].replicates === undefined);
	if (!open.length) return [];
	return [
		{
			code: 'replicates-assumed',
			level: 'note',
			message:
				'Values at equal times are taken as separate samples. If they are injections of one sample, say so: they then count once, and lack of fit is not tested against them.',
			runs: open.map((r) => r.id)
		}
	];
}
