/**
 * A curve as piecewise polynomials, and the value of a weighted sum of species on it.
 *
 *     Σ_i w_i c_i(t) + constant,   c_i(t) = Σ_k a_k T_k(x),   x = (2t − l − r)/(r − l) on the piece [l, r]
 *
 * How the pieces are made: `track.ts`.
 *
 * | symbol | name here |
 * | --- | --- |
 * | a_k of species i on piece p | `coefficients[(p·n + i)·SIZE + k]` |
 * | l, r | `edges[p]`, `edges[p + 1]` |
 *
 * Source: C. W. Clenshaw, Math. Tables Aids Comput. 9 (1955) 118 (sums of Chebyshev polynomials).
 */
import { clenshaw, SIZE } from './chebyshev';

export interface Track {
	readonly n: number;
	readonly pieces: number;
	/** pieces + 1 times, from 0 on, s. */
	readonly edges: Float64Array;
	readonly coefficients: Float64Array;
	readonly scales: Float64Array;
	/** Exact value at t = 0. */
	readonly start: Float64Array;
	/** Where the curve ends: the horizon, or the time from which it is `beyond`. */
	readonly endS: number;
	/** Value from `endS` on; null where the horizon ends the curve. */
	readonly beyond: Float64Array | null;
}

/** Σ w_i c_i(t) + constant from a track. */
export function formAt(track: Track, weights: ArrayLike<number>, constant: number, timeS: number): number {
	const { n, edges, pieces, beyond } = track;
	let sum = constant;
	if (timeS === 0) {
		for (let i = 0; i < n; i++) sum += weights[i] * track.start[i];
		return sum;
	}
	if (pieces === 0 || (timeS >= track.endS && beyond)) {
		for (let i = 0; i < n; i++) sum += weights[i] * (beyond ? beyond[i] : NaN);
		return sum;
	}
	let p = 0;
	for (let high = pieces - 1; p < high;) {
		const mid = (p + high + 1) >> 1;
		if (edges[mid] <= timeS) p = mid;
		else high = mid - 1;
	}
	const x = Math.max(-1, Math.min(1, (2 * timeS - edges[p] - edges[p + 1]) / (edges[p + 1] - edges[p])));
	for (let i = 0; i < n; i++)
		if (weights[i] !== 0) sum += weights[i] * clenshaw(track.coefficients, x, (p * n + i) * SIZE);
	return sum;
}
