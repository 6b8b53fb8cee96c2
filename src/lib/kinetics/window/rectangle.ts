/**
 * The largest rectangle of a grid in which every point is good.
 *
 * Row by row, each column's run of good points upwards is a bar; under a row, the widest rectangle of a given height is found
 * for every pair of edges. Area counts in the grid's own coordinates, each divided by its whole range, so that kelvins and
 * hours weigh alike. A rectangle needs two points each way: a line has no tolerance.
 *
 * Source: the bars-under-a-row reduction, D. Vandevoorde, Dr. Dobb's Journal 23 (1998) 84; for 200 × 400 points the plain
 * search over pairs of rows is fast enough.
 */

export interface GridRectangle {
	rows: [number, number];
	columns: [number, number];
	/** Share of the whole grid. */
	area: number;
}

/**
 * @param good row-major, rows × columns
 * @param rowAt, columnAt coordinates, ascending
 */
export function largestRectangle(
	good: ArrayLike<boolean | number>,
	rowAt: ArrayLike<number>,
	columnAt: ArrayLike<number>
): GridRectangle | null {
	const rows = rowAt.length;
	const columns = columnAt.length;
	const height = rowAt[rows - 1] - rowAt[0];
	const width = columnAt[columns - 1] - columnAt[0];
	let best: GridRectangle | null = null;
	const all = new Uint8Array(columns);
	for (let top = 0; top < rows - 1; top++) {
		all.fill(1);
		for (let bottom = top; bottom < rows; bottom++) {
			let any = false;
			for (let k = 0; k < columns; k++) {
				if (all[k] && !good[bottom * columns + k]) all[k] = 0;
				if (all[k]) any = true;
			}
			if (!any) break;
			if (bottom === top) continue;
			const tall = (rowAt[bottom] - rowAt[top]) / height;
			for (let k = 0; k < columns;) {
				if (!all[k]) {
					k++;
					continue;
				}
				const start = k;
				while (k < columns && all[k]) k++;
				const area = (tall * (columnAt[k - 1] - columnAt[start])) / width;
				if (area > (best?.area ?? 0)) best = { rows: [top, bottom], columns: [start, k - 1], area };
			}
		}
	}
	return best;
}
