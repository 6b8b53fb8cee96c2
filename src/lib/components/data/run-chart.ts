import type { ChartSeries } from '$lib/components/charts/types';
import type { AssayValue, RunContent } from '$lib/schemas/run';

/** Why a value is left out, or null where it is used. */
export function exclusionOf(content: RunContent, index: number, channel: string) {
	return (
		(content.exclusions ?? []).find(
			(e) => e.index === index && (e.channel === null || e.channel === channel)
		) ?? null
	);
}

const height = (value: AssayValue): number | null => {
	if (value === null || typeof value === 'number') return value;
	return 'below' in value ? value.below : value.above;
};

/** The measured points of a run; columns of one unit share an axis, the others are left to their own table. */
export function runSeries(content: RunContent, slots: Record<string, number>): ChartSeries[] {
	const unit = content.channels[0]?.unit;
	return content.channels
		.filter((channel) => channel.unit === unit)
		.map((channel, place) => ({
			id: channel.id,
			label: Object.keys(channel.weights).join(' + ') || channel.id,
			index: slots[Object.keys(channel.weights)[0]] ?? place,
			points: content.timepoints.flatMap((point, index) => {
				const value = point.values[channel.id] ?? null;
				const y = height(value);
				if (y === null) return [];
				return [
					{
						x: point.time,
						y,
						below: typeof value === 'object' && value !== null && 'below' in value,
						excluded: exclusionOf(content, index, channel.id) !== null,
						label: point.source?.cells?.[channel.id] ?? point.sampleId ?? ''
					}
				];
			})
		}));
}
