/** Hand-made linear systems for tests. */
import type { LinearSystem } from './types';

/** Transfers [from, to, rate, coefficient = 1]; `to` −1 is a loss. */
export function system(n: number, flows: [number, number, number, number?][]): LinearSystem {
	const outflow = new Float64Array(n);
	for (const [from, , rate] of flows) outflow[from] += rate;
	return {
		n,
		outflow,
		transfers: flows.flatMap(([from, to, rate, coefficient = 1], step) =>
			to < 0 || rate === 0 ? [] : [{ from, to, rate, coefficient, step, direction: 'forward' as const }]
		),
		flows: flows.flatMap(([from, , rate], step) =>
			rate === 0 ? [] : [{ step, direction: 'forward' as const, from, rate }]
		)
	};
}

/** 0 → 1 → 2 → … with the given constants. */
export const chain = (rates: number[]): LinearSystem =>
	system(
		rates.length + 1,
		rates.map((k, i) => [i, i + 1, k])
	);
