/**
 * How well is each parameter known? Flat directions, open profiles, bounds, correlation, modes that the times cannot show.
 */
import type { FitFinding } from '../../schemas/fit';
import type { FindingsInput } from './findings';
import { combinationWords, describeDirection, joined } from './identifiability';
import { simplerScheme } from './simpler';
import type { Slot } from './slots';
import { duration, figure, withUnit } from './words';

export function parameterFindings(input: FindingsInput): FitFinding[] {
	const open = openProfiles(input);
	return [
		...flatDirections(input),
		...open,
		...atBounds(input),
		...(open.length ? simplerScheme(input) : []),
		...correlated(input),
		...belowZero(input),
		...unseenModes(input)
	];
}

function flatDirections({ problem, uncertainty }: FindingsInput): FitFinding[] {
	const { spread, active } = uncertainty;
	return spread.singularValues.slice(spread.rank).map((_, k) => {
		const direction = describeDirection(
			problem,
			spread.directions[spread.rank + k],
			spread.columnNorms,
			active
		);
		return {
			code: 'not-determined',
			level: 'stop' as const,
			message: `These data do not determine ${joined(direction.parameters)}: ${combinationWords(direction)}. Fix one of them, or assay something that tells them apart.`,
			parameters: direction.parameters
		};
	});
}

function advice(slot: Slot, side: 'lower' | 'upper', known: boolean): string {
	if (slot.kind === 'rate')
		return side === 'lower'
			? 'Later samples, while this step still moves something, would narrow it.'
			: 'Earlier samples, or a slower run at lower temperature, would narrow it.';
	return known
		? 'More samples of another species or time would narrow it.'
		: 'Fix it, or measure it by itself.';
}

function openProfiles({ problem, profiles, report, best }: FindingsInput): FitFinding[] {
	if (!profiles) return [];
	return problem.free.flatMap((slot, j) => {
		const { lower, upper } = profiles[j];
		if ((lower !== null && upper !== null) || best.activeBounds[j] !== 0) return [];
		const parameter = report.parameters.find((p) => p.id === slot.id)!;
		const [low, high] = parameter.profileCi95 ?? [null, null];
		const level = Math.round(problem.request.options.confidenceLevel * 100);
		const known =
			low !== null
				? `it is at least ${withUnit(low, slot.unit)} (${level} %), with no upper limit`
				: high !== null
					? `it is at most ${withUnit(high, slot.unit)} (${level} %), and ${slot.scale === 'ln' ? 'zero cannot be excluded' : 'there is no lower limit'}`
					: 'neither a lower nor an upper limit can be given';
		return [
			{
				code: 'not-identifiable',
				level: 'caution' as const,
				message: `${slot.id} is not identifiable from these data: ${known}. ${advice(slot, low === null ? 'lower' : 'upper', low !== null || high !== null)}`,
				parameters: [slot.id]
			}
		];
	});
}

function atBounds({ problem, best, report }: FindingsInput): FitFinding[] {
	return problem.free.flatMap((slot, j) => {
		const side = best.activeBounds[j];
		if (side === 0) return [];
		const value = report.parameters.find((p) => p.id === slot.id)!.estimate;
		const own = side < 0 ? Number.isFinite(slot.lower) : Number.isFinite(slot.upper);
		const meaning =
			own || slot.kind === 'amount'
				? `It lies at its ${side < 0 ? 'lower' : 'upper'} bound (${withUnit(value, slot.unit)}), so no interval is given; the others are fitted as if it were fixed there.`
				: side < 0
					? 'The data want it as small as it can be: the step may not occur, or is too slow for these times.'
					: 'The data want it as large as it can be: it is too fast for these times to show.';
		return [
			{
				code: 'at-bound',
				level: 'caution' as const,
				message: `${slot.id}: ${meaning}`,
				parameters: [slot.id]
			}
		];
	});
}

function correlated({ problem, report, uncertainty }: FindingsInput): FitFinding[] {
	const findings: FitFinding[] = [];
	const { active, covariance } = uncertainty;
	for (let a = 0; a < active.length; a++)
		for (let b = a + 1; b < active.length; b++) {
			const [i, j] = [active[a], active[b]];
			const rho = report.correlation[i][j];
			if (!(Math.abs(rho) > 0.95) || Math.abs(rho) > 1 - 1e-9) continue;
			const [first, second] = [problem.free[i], problem.free[j]];
			const both = first.scale === 'ln' && second.scale === 'ln';
			const sign = rho > 0 ? -1 : 1;
			const variance = covariance[i][i] + covariance[j][j] + 2 * sign * covariance[i][j];
			const better =
				both && variance > 0 && variance < 0.25 * Math.min(covariance[i][i], covariance[j][j])
					? ` Their ${rho > 0 ? 'ratio' : 'product'} is known to ${figure(100 * Math.sqrt(variance), 2)} %.`
					: '';
			findings.push({
				code: 'correlated',
				level: 'caution',
				message: `${first.id} and ${second.id} are hard to tell apart (correlation ${rho.toFixed(3)}).${better} Trust the profile intervals and predictions more than either value.`,
				parameters: [first.id, second.id]
			});
		}
	return findings.slice(0, 6);
}

function belowZero({ problem, report }: FindingsInput): FitFinding[] {
	const ids = problem.free
		.filter((slot) => slot.scale === 'ln' || slot.kind === 'amount')
		.filter((slot) => (report.parameters.find((p) => p.id === slot.id)?.ci95?.[0] ?? 0) < 0)
		.map((slot) => slot.id);
	if (!ids.length) return [];
	return [
		{
			code: 'interval-below-zero',
			level: 'note',
			message: `The symmetric interval of ${joined(ids)} reaches below zero, which it cannot be: use the profile interval.`,
			parameters: ids
		}
	];
}

/** Rate constants whose half-life the sampled times cannot show. */
function unseenModes({ problem, best }: FindingsInput): FitFinding[] {
	const findings: FitFinding[] = [];
	problem.free.forEach((slot, j) => {
		if (slot.kind !== 'rate' || best.activeBounds[j] !== 0) return;
		let slow = true;
		let fast = true;
		let unit: 's' | 'min' | 'h' | 'd' = 'h';
		let halfLife = 0;
		for (const run of problem.runs)
			run.lnRates.forEach((linear) => {
				if (!linear.terms.some((t) => t.free === j)) return;
				let lnk = linear.constant;
				for (const t of linear.terms) lnk += t.coefficient * best.x[t.free];
				halfLife = Math.LN2 / Math.exp(lnk);
				unit = run.timeUnit;
				const times = Array.from(run.timesS).filter((t) => t > 0);
				if (!times.length) return;
				if (halfLife < 5 * times[times.length - 1]) slow = false;
				if (halfLife > 0.2 * times[0]) fast = false;
			});
		if (halfLife === 0 || (!slow && !fast)) return;
		findings.push({
			code: slow ? 'slower-than-data' : 'faster-than-data',
			level: 'caution',
			message: slow
				? `${slot.id} has a half-life of ${duration(halfLife, unit)}, more than five times the last sampled time: only its beginning was seen.`
				: `${slot.id} has a half-life of ${duration(halfLife, unit)}, less than a fifth of the first sampled time: it was over before the first sample.`,
			parameters: [slot.id]
		});
	});
	return findings;
}
