/**
 * Many early times at once, to full relative accuracy.
 *
 * Problem: just after the charge a species some steps down a chain is tiny beside the terms of its closed form, which then
 * loses its relative accuracy. With q the fastest total outflow, K + qI has no negative entry, and
 *
 *     c(t) = e^{−qt} Σ_m (t/t̂)^m v_m,   v_0 = c₀,  v_m = (t̂/m) (K + qI) v_{m−1}
 *
 * is a sum of non-negative terms for a non-negative charge: nothing cancels. The vectors v_m serve all times up to t̂. A species
 * r steps from the charge begins at m = r, and what is left out after m = r + 20 is below 1/20! of it while q t̂ ≤ 1.
 *
 * | symbol | name here |
 * | --- | --- |
 * | q | `shift` |
 * | v_m | `series[m·n …]` |
 *
 * Source: the expansion is that of A. Jensen, Skand. Aktuarietidskr. 36 (1953) 87, in powers of t.
 */
import type { Grid } from './grid';
import { Scratch } from './scratch';
import type { LinearSystem } from './types';

const TERMS_PAST_REACH = 20;

/** q of a network, 1/s. */
export function fastestOutflow({ outflow }: LinearSystem): number {
	let fastest = 0;
	for (const rate of outflow) if (rate > fastest) fastest = rate;
	return fastest;
}

/** Whether the series serves every time up to this one. */
export function isEarly(shift: number, timeS: number): boolean {
	return shift * timeS <= 1;
}

/**
 * Writes c at the times of a grid, times-major, each value with a relative error of some 1e-14.
 * @param shift `fastestOutflow(system)`; every time must be early (`isEarly`)
 */
export function earlyCurves(
	system: LinearSystem,
	shift: number,
	charge: ArrayLike<number>,
	{ firstS, stepS, count }: Grid,
	out: Float64Array
): void {
	const { n } = system;
	const lastS = firstS + (count - 1) * stepS;
	const series = seriesTo(system, shift, charge, lastS);
	for (let k = 0, to = 0; k < count; k++) {
		const timeS = firstS + k * stepS;
		const x = lastS === 0 ? 0 : timeS / lastS;
		const damping = Math.exp(-shift * timeS);
		for (let i = 0; i < n; i++, to++) {
			let sum = 0;
			for (let at = series.length - n + i; at >= 0; at -= n) sum = sum * x + series[at];
			out[to] = damping * sum;
		}
	}
}

function seriesTo(
	{ n, outflow, transfers }: LinearSystem,
	shift: number,
	charge: ArrayLike<number>,
	timeS: number
): Float64Array {
	const length = (n + TERMS_PAST_REACH) * n;
	const series = seriesMemory.room(length);
	series.set(charge);
	for (let m = 1, at = n; at < length; m++, at += n) {
		const h = timeS / m;
		for (let i = 0; i < n; i++) series[at + i] = (shift - outflow[i]) * h * series[at - n + i];
		for (let e = 0; e < transfers.length; e++) {
			const { from, to, rate, coefficient } = transfers[e];
			series[at + to] += rate * coefficient * h * series[at - n + from];
		}
		if (m >= n && !counts(series, at, n)) return series.subarray(0, at);
	}
	return series.subarray(0, length);
}

const seriesMemory = new Scratch();

/** Whether some entry of the term at `at` is worth adding to the same entry of the terms before. */
function counts(series: Float64Array, at: number, n: number): boolean {
	for (let i = 0; i < n; i++) {
		let largest = 0;
		for (let before = i; before < at; before += n) largest = Math.max(largest, Math.abs(series[before]));
		if (Math.abs(series[at + i]) > 1e-18 * largest) return true;
	}
	return false;
}
