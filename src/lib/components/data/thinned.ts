/** Fewer marks than a long series has points: what is drawn in their place looks the same, and is quick. */

/** Places of `most` entries spread evenly over a list, first and last among them; all where there are no more. */
export function evenPlaces(length: number, most: number): number[] {
	if (length <= most) return Array.from({ length }, (_, i) => i);
	const step = (length - 1) / (most - 1);
	return Array.from({ length: most }, (_, i) => Math.round(i * step));
}

export interface Place {
	x: number;
	y: number;
}

/**
 * Of points that fall on the same column of pixels the first, the lowest, the highest and the last, in their order: a line
 * through them covers the same pixels as one through all.
 */
export function pixelPlaces(points: readonly Place[], pixelOf: (x: number) => number): number[] {
	const columns = new Map<number, { first: number; low: number; high: number; last: number }>();
	points.forEach((point, i) => {
		const column = Math.round(pixelOf(point.x));
		const one = columns.get(column);
		if (!one) {
			columns.set(column, { first: i, low: i, high: i, last: i });
			return;
		}
		if (point.y < points[one.low].y) one.low = i;
		if (point.y > points[one.high].y) one.high = i;
		one.last = i;
	});
	const kept = new Set<number>();
	for (const one of columns.values()) for (const i of [one.first, one.low, one.high, one.last]) kept.add(i);
	return [...kept].sort((a, b) => a - b);
}
