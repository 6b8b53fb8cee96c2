import type { RunContent } from '$lib/schemas/run';
import { valueText } from './quantities';

/** The points of a run as tab-separated text with header and units, as a spreadsheet program takes it. */
export function pointsText(content: RunContent, channels: { id: string; name: string; unit: string }[]): string {
	const head = [`time (${content.timeUnit})`, ...channels.map((c) => `${c.name} (${c.unit})`)];
	const lines = content.timepoints.map((point) => [
		String(point.time),
		...channels.map((c) => valueText(point.values[c.id]).replace('–', '').replace('−', '-'))
	]);
	return [head, ...lines].map((line) => line.join('\t')).join('\n');
}
