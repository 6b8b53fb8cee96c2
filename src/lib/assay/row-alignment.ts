/**
 * Rows of two versions of a sheet brought together by what they hold, so that an inserted row is one insertion and not a change of
 * every row below it. Equal rows are the anchors: the longest common subsequence of the rows, by the greedy method of E. W. Myers,
 * "An O(ND) difference algorithm and its variations", Algorithmica 1 (1986) 251–266. Between two anchors, rows that still share
 * cells are paired, so that a corrected value stays a change of one cell.
 */

/** Indexes of an old and a new row that belong together; null on the side where there is none. */
export type RowPair = [old: number, now: number] | [old: number, now: null] | [old: null, now: number];

/** Beyond this many differing rows the rest is compared in order: a file of its own, not a correction. */
const MOST_DIFFERENCES = 600;
/** Pairs between two anchors that are weighed against each other. */
const MOST_PAIRS = 40_000;

/** `keys` say which rows are equal; `alike` how many cells two rows share, from 0 to 1. */
export function alignRows(
	old: readonly string[],
	now: readonly string[],
	alike: (old: number, now: number) => number
): RowPair[] {
	const pairs: RowPair[] = [];
	let [i, j] = [0, 0];
	for (const [a, b] of [...anchors(old, now), [old.length, now.length] as const]) {
		pairs.push(...between(range(i, a), range(j, b), alike));
		if (a < old.length && b < now.length) pairs.push([a, b]);
		[i, j] = [a + 1, b + 1];
	}
	return pairs;
}

const range = (from: number, to: number): number[] =>
	Array.from({ length: Math.max(0, to - from) }, (_, k) => from + k);

/** Equal rows in order, of the longest common subsequence. */
function anchors(old: readonly string[], now: readonly string[]): [number, number][] {
	let start = 0;
	while (start < old.length && start < now.length && old[start] === now[start]) start++;
	let [oldEnd, nowEnd] = [old.length, now.length];
	while (oldEnd > start && nowEnd > start && old[oldEnd - 1] === now[nowEnd - 1]) {
		oldEnd--;
		nowEnd--;
	}
	const head = range(0, start).map((k): [number, number] => [k, k]);
	const tail = range(oldEnd, old.length).map((k): [number, number] => [k, k - oldEnd + nowEnd]);
	const middle = commonRows(old.slice(start, oldEnd), now.slice(start, nowEnd));
	return [...head, ...middle.map(([a, b]): [number, number] => [a + start, b + start]), ...tail];
}

/** Myers' greedy search; the furthest reach of each step is kept to walk back. Empty when the rows differ too much. */
function commonRows(old: string[], now: string[]): [number, number][] {
	const most = Math.min(old.length + now.length, MOST_DIFFERENCES);
	let reach = new Map<number, number>([[1, 0]]);
	const steps: Map<number, number>[] = [];
	for (let d = 0; d <= most; d++) {
		steps.push(reach);
		const next = new Map(reach);
		for (let k = -d; k <= d; k += 2) {
			let x = goesDown(reach, k, d) ? (reach.get(k + 1) ?? 0) : (reach.get(k - 1) ?? 0) + 1;
			while (x < old.length && x - k < now.length && old[x] === now[x - k]) x++;
			next.set(k, x);
			if (x >= old.length && x - k >= now.length) return walkBack(steps, old.length, now.length);
		}
		reach = next;
	}
	return [];
}

const goesDown = (reach: Map<number, number>, k: number, d: number): boolean =>
	k === -d || (k !== d && (reach.get(k - 1) ?? -1) < (reach.get(k + 1) ?? -1));

function walkBack(steps: Map<number, number>[], oldEnd: number, nowEnd: number): [number, number][] {
	const found: [number, number][] = [];
	let [x, y] = [oldEnd, nowEnd];
	for (let d = steps.length - 1; d >= 0; d--) {
		const k = x - y;
		const before = goesDown(steps[d], k, d) ? k + 1 : k - 1;
		const fromX = steps[d].get(before) ?? 0;
		const fromY = fromX - before;
		while (x > fromX && y > fromY && x > 0 && y > 0) found.push([--x, --y]);
		if (d > 0) [x, y] = [fromX, fromY];
	}
	return found.reverse();
}

/** Rows without an equal: paired where they are alike, in order, so that the likeness of all pairs is greatest. */
function between(old: number[], now: number[], alike: (old: number, now: number) => number): RowPair[] {
	if (old.length === now.length) return old.map((a, k): RowPair => [a, now[k]]);
	if (old.length === 0) return now.map((b): RowPair => [null, b]);
	if (now.length === 0) return old.map((a): RowPair => [a, null]);
	if (old.length * now.length > MOST_PAIRS) return inOrder(old, now);
	const best = old.map(() => new Float64Array(now.length + 1));
	best.push(new Float64Array(now.length + 1));
	for (let i = old.length - 1; i >= 0; i--)
		for (let j = now.length - 1; j >= 0; j--)
			best[i][j] = Math.max(best[i + 1][j], best[i][j + 1], best[i + 1][j + 1] + alike(old[i], now[j]));
	const pairs: RowPair[] = [];
	let [i, j] = [0, 0];
	while (i < old.length && j < now.length) {
		const likeness = alike(old[i], now[j]);
		if (likeness > 0 && best[i][j] === best[i + 1][j + 1] + likeness) pairs.push([old[i++], now[j++]]);
		else if (best[i][j] === best[i + 1][j]) pairs.push([old[i++], null]);
		else pairs.push([null, now[j++]]);
	}
	return [
		...pairs,
		...old.slice(i).map((a): RowPair => [a, null]),
		...now.slice(j).map((b): RowPair => [null, b])
	];
}

function inOrder(old: number[], now: number[]): RowPair[] {
	const shared = Math.min(old.length, now.length);
	return [
		...old.slice(0, shared).map((a, k): RowPair => [a, now[k]]),
		...old.slice(shared).map((a): RowPair => [a, null]),
		...now.slice(shared).map((b): RowPair => [null, b])
	];
}
