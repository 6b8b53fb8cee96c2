/**
 * Strongly connected components of the step graph.
 *
 * Problem: species that can turn into one another (A ⇌ B, A → B → C → A) must be solved together; everything else can be
 * solved one after the other. The components, in topological order, make the rate matrix block triangular.
 *
 * Method: R. E. Tarjan, Depth-first search and linear graph algorithms, SIAM J. Comput. 1 (1972) 146; written with an
 * explicit stack. Tarjan finds the components downstream first; they are returned upstream first.
 */
import type { LinearSystem } from './types';

export interface Components {
	/** Species of each component, ascending; components ordered so that flows only lead to the same or a later one. */
	blocks: Int32Array[];
	/** Component of each species. */
	blockOf: Int32Array;
}

/** Components of any directed graph given as successor lists. */
export function componentsOf(successors: readonly (readonly number[])[]): Components {
	const n = successors.length;
	const order = new Int32Array(n).fill(-1);
	const low = new Int32Array(n);
	const onStack = new Uint8Array(n);
	const next = new Int32Array(n);
	const stack: number[] = [];
	const found: number[][] = [];
	let counter = 0;
	for (let root = 0; root < n; root++) {
		if (order[root] >= 0) continue;
		const path = [root];
		while (path.length > 0) {
			const v = path[path.length - 1];
			if (order[v] < 0) {
				order[v] = low[v] = counter++;
				stack.push(v);
				onStack[v] = 1;
			}
			if (next[v] < successors[v].length) {
				const w = successors[v][next[v]++];
				if (order[w] < 0) path.push(w);
				else if (onStack[w]) low[v] = Math.min(low[v], order[w]);
				continue;
			}
			path.pop();
			if (path.length > 0) low[path[path.length - 1]] = Math.min(low[path[path.length - 1]], low[v]);
			if (low[v] === order[v]) found.push(popComponent(stack, onStack, v));
		}
	}
	return numbered(found.reverse(), n);
}

function popComponent(stack: number[], onStack: Uint8Array, root: number): number[] {
	const members: number[] = [];
	for (;;) {
		const w = stack.pop()!;
		onStack[w] = 0;
		members.push(w);
		if (w === root) return members.length > 1 ? members.sort((a, b) => a - b) : members;
	}
}

function numbered(found: number[][], n: number): Components {
	const blockOf = new Int32Array(n);
	found.forEach((members, b) => members.forEach((i) => (blockOf[i] = b)));
	return { blocks: found.map((members) => new Int32Array(members)), blockOf };
}

/** Components of a linear system's flows; a zero rate or coefficient does not connect. */
export function components(system: LinearSystem): Components {
	const successors: number[][] = [];
	for (let i = 0; i < system.n; i++) successors.push([]);
	for (const { from, to, rate, coefficient } of system.transfers)
		if (rate > 0 && coefficient > 0 && from !== to) successors[from].push(to);
	return componentsOf(successors);
}
