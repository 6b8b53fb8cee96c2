import type { ChartSeries } from '$lib/components/charts/types';
import type { AssayValue, RunContent } from '$lib/schemas/run';
import { Exclusions } from './exclusions';
import { evenPlaces } from './thinned';

/** Times that are drawn: more marks than a screen has room for say nothing and take seconds. */
export const MOST_DRAWN = 300;

const height = (value: AssayValue): number | null => {
	if (value === null || typeof value === 'number') return value;
	return 'below' in value ? value.below : value.above;
};

/** Rows to be drawn: spread evenly where there are many, and always those with a value left out. */
function rowsDrawn(content: RunContent): number[] {
	const even = evenPlaces(content.timepoints.length, MOST_DRAWN);
	const out = (content.exclusions ?? []).map((e) => e.index).filter((i) => i < content.timepoints.length);
	return [...new Set([...even, ...out])].sort((a, b) => a - b);
}

/** Said under the chart where not every time is drawn; null where all are. */
export function drawnWords(content: RunContent): string | null {
	const all = content.timepoints.length;
	if (all <= MOST_DRAWN) return null;
	return `${rowsDrawn(content).length} of ${all} times are drawn, spread evenly, with all that are left out; the points below are complete.`;
}

/** The measured points of a run; columns of one unit share an axis, the others are left to their own table. */
export function runSeries(content: RunContent, slots: Record<string, number>): ChartSeries[] {
	const unit = content.channels[0]?.unit;
	const rows = rowsDrawn(content);
	const exclusions = new Exclusions(content);
	return content.channels
		.filter((channel) => channel.unit === unit)
		.map((channel, place) => ({
			id: channel.id,
			label: Object.keys(channel.weights).join(' + ') || channel.id,
			index: slots[Object.keys(channel.weights)[0]] ?? place,
			points: rows.flatMap((index) => {
				const point = content.timepoints[index];
				const value = point.values[channel.id] ?? null;
				const y = height(value);
				if (y === null) return [];
				return [
					{
						x: point.time,
						y,
						below: typeof value === 'object' && value !== null && 'below' in value,
						excluded: exclusions.of(index, channel.id) !== null,
						label: point.source?.cells?.[channel.id] ?? point.sampleId ?? ''
					}
				];
			})
		}));
}
