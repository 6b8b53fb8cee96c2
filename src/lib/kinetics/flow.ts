/**
 * From a batch to flow: plug flow, one stirred tank, tanks in series.
 *
 *     plug flow           c = e^{Kτ} c₀
 *     stirred tank        c = (I − τK)⁻¹ c₀,   N tanks: c = (I − τK/N)^{−N} c₀
 *
 * A tank is a batch in which every species also leaves with 1/τ, collected for ever: c = (1/τ) ∫₀^∞ e^{(K − I/τ)t} c₀ dt, so its
 * composition is a throughput, found by elimination without subtraction (`final-composition.ts`).
 *
 * | symbol | name here |
 * | --- | --- |
 * | τ | `residenceS` |
 * | N | `count` |
 * | K − I/τ | `withWashout` |
 *
 * Derivatives: `flow-sensitivity.ts`; a measured distribution of residence times: `residence-table.ts`.
 *
 * Source: P. V. Danckwerts, Chem. Eng. Sci. 2 (1953) 1; O. Levenspiel, Chemical Reaction Engineering, 3rd ed. (1999), ch. 8,
 * 11, 14.
 */
import { finalComposition } from './final-composition';
import { Propagator } from './propagator';
import type { LinearSystem } from './types';

/** Outlet of a plug-flow reactor, mol/L. */
export function plugFlow(system: LinearSystem, feed: ArrayLike<number>, residenceS: number): Float64Array {
	checkResidence(residenceS);
	return new Propagator(system).apply(residenceS, feed);
}

/** Outlet of one stirred tank at steady state, mol/L. */
export function stirredTank(system: LinearSystem, feed: ArrayLike<number>, residenceS: number): Float64Array {
	return tanksInSeries(system, feed, residenceS, 1);
}

/** Outlet of `count` equal stirred tanks with `residenceS` over all of them, mol/L. */
export function tanksInSeries(
	system: LinearSystem,
	feed: ArrayLike<number>,
	residenceS: number,
	count: number
): Float64Array {
	checkResidence(residenceS);
	checkCount(count);
	let c: Float64Array = Float64Array.from(feed);
	if (residenceS === 0) return c;
	const each = residenceS / count;
	const washed = withWashout(system, each);
	for (let k = 0; k < count; k++) c = throughTank(washed, each, c);
	return c;
}

/** The system in which every species also leaves with 1/τ. */
export function withWashout(system: LinearSystem, tau: number): LinearSystem {
	const { n, transfers, outflow } = system;
	return { n, transfers, outflow: outflow.map((k) => k + 1 / tau) };
}

/** One tank: (I − τK)⁻¹ feed; the feed may be a derivative of either sign. */
export function throughTank(washed: LinearSystem, tau: number, feed: Float64Array): Float64Array {
	return finalComposition(washed, feed).throughput.map((value) => value / tau);
}

/** @throws RangeError unless it is a time of 0 s or more. */
export function checkResidence(residenceS: number): void {
	if (!(residenceS >= 0 && Number.isFinite(residenceS)))
		throw new RangeError(`A residence time of 0 s or more is expected; found ${residenceS} s.`);
}

/** @throws RangeError unless it is a whole number of one or more. */
export function checkCount(count: number): void {
	if (!(Number.isInteger(count) && count >= 1))
		throw new RangeError(`A whole number of tanks, one or more, is expected; found ${count}.`);
}
