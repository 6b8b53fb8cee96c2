/**
 * The times at which samples can be taken: evenly and geometrically spaced over the span, inside the windows, and a first choice
 * among them that keeps the least gap.
 */
import type { SamplingOptions } from './sampling-plan';

const GRID = 240;

/** Allowed times, ascending, in the run's time unit. @throws RangeError in words for limits that leave no room */
export function allowedTimes({
	earliest,
	latest,
	windows,
	samples,
	minimumGap = 0
}: SamplingOptions): number[] {
	if (!(earliest >= 0) || !(latest > earliest))
		throw new RangeError(`The latest time must lie after the earliest; found ${earliest} and ${latest}.`);
	if (!Number.isInteger(samples) || samples < 1 || samples > 60)
		throw new RangeError(`Between 1 and 60 samples can be planned; found ${samples}.`);
	if (minimumGap * (samples - 1) > latest - earliest)
		throw new RangeError(
			`${samples} samples at least ${minimumGap} apart do not fit between ${earliest} and ${latest}.`
		);
	const linear = Array.from({ length: GRID }, (_, k) => earliest + ((latest - earliest) * k) / (GRID - 1));
	const low = Math.max(earliest, latest * 1e-3);
	const log = Array.from({ length: GRID }, (_, k) => low * (latest / low) ** (k / (GRID - 1)));
	const inside = (t: number) => !windows?.length || windows.some(([a, b]) => t >= a && t <= b);
	const edges = (windows ?? []).flat().filter((t) => t >= earliest && t <= latest);
	const all = [...new Set([...linear, ...log, ...edges])]
		.filter((t) => t > 0 && inside(t))
		.sort((a, b) => a - b);
	if (all.length === 0) throw new RangeError('The windows leave no time to sample.');
	return all;
}

/** First choice: spread evenly over the grid, with the gap kept where that is possible. */
export function spread(grid: number[], samples: number, gap: number): number[] {
	const chosen: number[] = [];
	let next = -Infinity;
	const last = grid.length - 1;
	for (let q = 0; q < samples; q++) {
		const even = Math.round(((q + 0.5) / samples) * last);
		let k = Math.max(even, 0);
		while (k < last && grid[k] < next) k++;
		chosen.push(k);
		next = grid[k] + gap;
	}
	const kept = chosen.every((k, q) => q === 0 || grid[k] - grid[chosen[q - 1]] >= gap - 1e-12);
	if (kept) return chosen;
	// Tight gaps: pack from the front.
	const packed: number[] = [];
	next = -Infinity;
	for (let k = 0; k <= last && packed.length < samples; k++)
		if (grid[k] >= next - 1e-12) {
			packed.push(k);
			next = grid[k] + gap;
		}
	if (packed.length < samples)
		throw new RangeError(`${samples} samples at least ${gap} apart do not fit into the allowed times.`);
	return packed;
}
