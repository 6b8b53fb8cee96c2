/** A run as the scheme page shows it: its conditions, its sample times, its points in the axes' units. */
import { fittableSi, toSi } from '$lib/kinetics';
import type { RunContent } from '$lib/schemas/run';
import type { ChartPoint } from '../charts/types';
import { SECONDS } from './simulate';

export interface RunOnScheme {
	id: string;
	name: string;
	content: RunContent;
}

/** Elapsed sample times in seconds, each once. */
export function sampleTimes(content: RunContent): number[] {
	const unit = SECONDS[content.timeUnit];
	const excluded = new Set(content.exclusions?.filter((e) => e.channel === null).map((e) => e.index));
	const times = content.timepoints.filter((_, i) => !excluded.has(i)).map((t) => t.time * unit);
	return [...new Set(times)].filter((t) => t > 0).sort((a, b) => a - b);
}

const orNull = <T>(read: () => T): T | null => {
	try {
		return read();
	} catch {
		return null;
	}
};

/** Charge and excess in mol/L; what has no usable unit is left out. */
export function chargeOf(content: RunContent): Record<string, number> {
	const charge: Record<string, number> = {};
	for (const [id, value] of Object.entries(content.initial)) {
		const si = orNull(() => fittableSi(value, 'concentration'));
		if (si !== null) charge[id] = si;
	}
	for (const [id, value] of Object.entries(content.excess)) {
		const si = orNull(() => toSi(value, 'concentration'));
		if (si !== null) charge[id] = si;
	}
	return charge;
}

/** Points by species, time in `timeUnit`, value in mol/L; only channels that see one species in a concentration. */
export function pointsOf(content: RunContent, timeUnit: string): Map<string, ChartPoint[]> {
	const out = new Map<string, ChartPoint[]>();
	const factor = SECONDS[content.timeUnit] / SECONDS[timeUnit];
	for (const channel of content.channels) {
		const seen = Object.entries(channel.weights).filter(([, w]) => w !== 0);
		if (seen.length !== 1 || seen[0][1] !== 1 || channel.responseFactor) continue;
		if (channel.unit.includes('%')) continue;
		const scale = orNull(() => toSi({ value: 1, unit: channel.unit }, 'concentration'));
		if (scale === null) continue;
		const points: ChartPoint[] = [];
		content.timepoints.forEach((timepoint, index) => {
			const value = timepoint.values[channel.id];
			if (value === null || value === undefined) return;
			if (typeof value === 'object' && 'above' in value) return;
			const excluded = content.exclusions?.some(
				(e) => e.index === index && (e.channel === null || e.channel === channel.id)
			);
			const below = typeof value === 'object';
			points.push({
				x: timepoint.time * factor,
				y: (below ? value.below : value) * scale,
				...(below ? { below } : {}),
				...(excluded ? { excluded } : {})
			});
		});
		out.set(seen[0][0], points);
	}
	return out;
}
