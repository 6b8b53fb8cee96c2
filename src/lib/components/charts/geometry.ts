/** Pure helpers of the charts: where labels go and what a curve reads at one time. */

/**
 * Moves labels apart along one axis so that neighbours keep `gap`, each as near to its own place as the others allow
 * (pool-adjacent-violators on the wanted places). Answers in the order given.
 */
export function spreadLabels(wanted: readonly number[], gap: number, low: number, high: number): number[] {
	const order = wanted.map((y, i) => ({ y, i })).sort((a, b) => a.y - b.y || a.i - b.i);
	const groups: { sum: number; count: number; start: number }[] = [];
	order.forEach(({ y }, rank) => {
		groups.push({ sum: y - rank * gap, count: 1, start: rank });
		while (groups.length > 1) {
			const last = groups[groups.length - 1];
			const before = groups[groups.length - 2];
			if (before.sum / before.count <= last.sum / last.count) break;
			before.sum += last.sum;
			before.count += last.count;
			groups.pop();
		}
	});
	const out = new Array<number>(wanted.length);
	const room = high - (wanted.length - 1) * gap;
	for (const group of groups) {
		const base = Math.max(low, Math.min(room, group.sum / group.count));
		for (let k = 0; k < group.count; k++) {
			const rank = group.start + k;
			out[order[rank].i] = base + rank * gap;
		}
	}
	return out;
}

/** Linear interpolation in a rising grid; NaN outside of it. */
export function valueAt(x: ArrayLike<number>, y: ArrayLike<number>, at: number): number {
	const n = x.length;
	if (n === 0 || !(at >= x[0]) || at > x[n - 1]) return Number.NaN;
	let low = 0;
	let high = n - 1;
	while (high - low > 1) {
		const middle = (low + high) >> 1;
		if (x[middle] <= at) low = middle;
		else high = middle;
	}
	if (high === low || x[high] === x[low]) return y[low];
	return y[low] + ((y[high] - y[low]) * (at - x[low])) / (x[high] - x[low]);
}

/** Smallest and largest value of everything drawn on one axis; null while there is nothing. */
export function extent(lists: Iterable<ArrayLike<number>>, positiveOnly = false): [number, number] | null {
	let low = Infinity;
	let high = -Infinity;
	for (const list of lists)
		for (let i = 0; i < list.length; i++) {
			const v = list[i];
			if (!Number.isFinite(v) || (positiveOnly && v <= 0)) continue;
			if (v < low) low = v;
			if (v > high) high = v;
		}
	return low <= high ? [low, high] : null;
}

/** A round number a little above `value`, for the end of an axis. */
export function roundUp(value: number): number {
	if (!(value > 0)) return 1;
	const unit = 10 ** Math.floor(Math.log10(value));
	for (const m of [1, 1.2, 1.5, 2, 2.5, 3, 4, 5, 6, 8, 10])
		if (value <= m * unit * (1 + 1e-9)) return m * unit;
	return 10 * unit;
}
