/**
 * Error models: the standard deviation of every point, up to the common factor s.
 *
 *     constant      σ = 1 (in the channel's unit)
 *     proportional  σ = |y|, not below the channel's quantitation limit, else 1 % of its largest value
 *     combined      σ² = a² + (b y)², a in the channel's unit, b a fraction; one pair for all or one per channel
 *     replicates    σ = standard deviation of separate samples at equal times, pooled per channel
 *
 * With `combined` and `replicates` σ is absolute and s near one says that the scheme leaves no more than the assay's scatter.
 * y is the value observed; for a limit, the limit.
 *
 * Source: Bates & Watts (1988) 1.3 and 3.8; Draper & Smith, Applied Regression Analysis, 2.1 (pure error).
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import type { KineticProblem } from './problem';
import type { RunModel } from './run-model';
import { replicateGroups } from './replicates';

type Weighting = FitRequest['options']['weighting'];

export function assignSigmas(request: FitRequest, runs: RunModel[], issues: FitFinding[]): void {
	const { weighting } = request.options;
	if (weighting.model === 'proportional') proportional(runs, issues);
	else if (weighting.model === 'combined') combined(weighting, runs, issues);
	else if (weighting.model === 'replicates') fromReplicates(request, runs, issues);
	else if (weighting.perChannel) perChannelConstant(weighting, runs);
	if (weighting.model === 'constant' && !weighting.perChannel) noteMixedUnits(runs, issues);
}

function proportional(runs: RunModel[], issues: FitFinding[]): void {
	let floored = 0;
	for (const run of runs)
		run.channels.forEach((channel, c) => {
			const mine = run.points.filter((p) => p.channel === c);
			const largest = Math.max(...mine.map((p) => Math.abs(p.observed)), 0);
			const floor = channel.loq ?? 0.01 * largest;
			for (const point of mine) {
				if (Math.abs(point.observed) < floor) floored++;
				point.sigma = Math.max(Math.abs(point.observed), floor) || 1;
			}
		});
	if (floored > 0)
		issues.push({
			code: 'weight-floor',
			level: 'note',
			message: `${floored} value${floored === 1 ? '' : 's'} near zero would weigh without limit under proportional weights; ${floored === 1 ? 'it is' : 'they are'} weighed as at the quantitation limit, or at 1 % of the channel's largest value.`
		});
}

function combined(weighting: Weighting, runs: RunModel[], issues: FitFinding[]): void {
	for (const run of runs)
		run.channels.forEach((channel, c) => {
			const own = weighting.perChannel?.[channel.id];
			const a = own?.a ?? weighting.a;
			const b = own?.b ?? weighting.b ?? 0;
			if (a === undefined) {
				issues.push({
					code: 'weights-incomplete',
					level: 'stop',
					message: `Combined weights need the constant part a (in ${channel.unit}) for channel ${channel.id} of run ${run.id}. Give "a", or choose another error model.`,
					runs: [run.id]
				});
				return;
			}
			for (const point of run.points)
				if (point.channel === c) point.sigma = Math.sqrt(a * a + (b * point.observed) ** 2);
		});
}

function perChannelConstant(weighting: Weighting, runs: RunModel[]): void {
	for (const run of runs)
		for (const point of run.points) {
			const own = weighting.perChannel?.[run.channels[point.channel].id];
			if (own) point.sigma = Math.sqrt(own.a * own.a + (own.b * point.observed) ** 2);
		}
}

function fromReplicates(request: FitRequest, runs: RunModel[], issues: FitFinding[]): void {
	const pooled = new Map<string, { ss: number; df: number }>();
	for (const group of replicateGroups(request, runs)) {
		const id = runs[group[0].run].channels[group[0].channel].id;
		const mean = group.reduce((a, p) => a + p.observed, 0) / group.length;
		const entry = pooled.get(id) ?? { ss: 0, df: 0 };
		entry.ss += group.reduce((a, p) => a + (p.observed - mean) ** 2, 0);
		entry.df += group.length - 1;
		pooled.set(id, entry);
	}
	const missing = new Set<string>();
	for (const run of runs)
		for (const point of run.points) {
			const { id } = run.channels[point.channel];
			const entry = pooled.get(id);
			if (entry && entry.df > 0 && entry.ss > 0) point.sigma = Math.sqrt(entry.ss / entry.df);
			else missing.add(id);
		}
	if (missing.size > 0)
		issues.push({
			code: 'weights-incomplete',
			level: 'stop',
			message: `Weights from replicates need separate samples at equal times that differ, for channel ${[...missing].join(', ')}. Choose another error model, or add replicates.`
		});
}

function noteMixedUnits(runs: RunModel[], issues: FitFinding[]): void {
	const units = new Set(
		runs.flatMap((r) => r.channels.filter((_, c) => r.points.some((p) => p.channel === c)).map((c) => c.unit))
	);
	if (units.size < 2) return;
	issues.push({
		code: 'units-mixed',
		level: 'caution',
		message: `Constant weights compare channels in different units (${[...units].join(', ')}) as they stand, so the one with the larger numbers rules. State an error per channel, or use proportional weights.`
	});
}

/**
 * Standard deviation that the fit's error model gives a new value of a channel, up to the factor s.
 * A channel that the fit did not have takes the constant part of the model.
 */
export function sigmaFor(problem: KineticProblem, channelId: string, value: number): number {
	const { weighting } = problem.request.options;
	const own = weighting.perChannel?.[channelId];
	const runs = problem.runs.filter((r) => r.channels.some((c) => c.id === channelId));
	const points = runs.flatMap((r) => r.points.filter((p) => r.channels[p.channel].id === channelId));
	switch (weighting.model) {
		case 'proportional': {
			const loq = runs[0]?.channels.find((c) => c.id === channelId)?.loq;
			const floor = loq ?? 0.01 * Math.max(0, ...points.map((p) => Math.abs(p.observed)));
			return Math.max(Math.abs(value), floor);
		}
		case 'combined':
			return Math.hypot(own?.a ?? weighting.a ?? 0, (own?.b ?? weighting.b ?? 0) * value);
		case 'replicates':
			return points[0]?.sigma ?? 1;
		case 'constant':
			return own ? Math.hypot(own.a, own.b * value) : 1;
	}
}
