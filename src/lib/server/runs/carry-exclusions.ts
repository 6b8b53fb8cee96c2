import type { ExclusionContent, RunContent, TimepointContent } from '$lib/schemas/run';
import { contentHash } from '../audit/canonical';

const valueOf = (point: TimepointContent, channel: string | null): string =>
	contentHash(channel === null ? point.values : (point.values[channel] ?? null));

/** Rows are told apart by time and by which of several rows at that time they are. */
function places(content: RunContent): string[] {
	const seen = new Map<number, number>();
	return content.timepoints.map(({ time }) => {
		const nth = (seen.get(time) ?? 0) + 1;
		seen.set(time, nth);
		return `${time} ${nth}`;
	});
}

/**
 * What was left out stays left out when a run is read anew, as long as it is the same value at the same time in the same
 * unit of time; a value that changed is used again until somebody leaves it out, and the revision lists it.
 */
export function carryExclusions(before: RunContent, after: RunContent): RunContent {
	const own = before.exclusions ?? [];
	if (own.length === 0 || before.timeUnit !== after.timeUnit) return after;
	const [old, now] = [places(before), places(after)];
	const kept = own.flatMap((exclusion): ExclusionContent[] => {
		const index = now.indexOf(old[exclusion.index]);
		if (index < 0) return [];
		const { channel } = exclusion;
		const same =
			valueOf(before.timepoints[exclusion.index], channel) === valueOf(after.timepoints[index], channel);
		return same ? [{ ...exclusion, index }] : [];
	});
	return kept.length ? { ...after, exclusions: kept } : after;
}
