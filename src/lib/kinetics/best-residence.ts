/**
 * The residence time at which a species is highest at the outlet: plug flow or tanks in series.
 *
 *     max over τ of c_i(τ),   searched on ln τ: a grid from e⁻⁷ of the fastest to e⁷ of the slowest time constant, then golden section
 *
 * | symbol | name here |
 * | --- | --- |
 * | τ | `residenceS` |
 * | number of tanks, Infinity for plug flow | `count` |
 *
 * Source: O. Levenspiel, Chemical Reaction Engineering, 3rd ed. (1999), ch. 8; J. Kiefer, Proc. Amer. Math. Soc. 4 (1953) 502
 * (golden section).
 */
import { tanksInSeries } from './flow';
import { Propagator } from './propagator';
import type { LinearSystem } from './types';

/** Residence time at which a species is highest at the outlet of `count` tanks (Infinity: plug flow), with its height. */
export function bestResidence(
	system: LinearSystem,
	feed: ArrayLike<number>,
	species: number,
	count: number
): { residenceS: number; value: number } {
	const propagator = new Propagator(system);
	const height = (lnTau: number) =>
		count === Infinity
			? propagator.apply(Math.exp(lnTau), feed)[species]
			: tanksInSeries(system, feed, Math.exp(lnTau), count)[species];
	const rates = Array.from(system.outflow).filter((k) => k > 0);
	if (rates.length === 0) return { residenceS: 0, value: feed[species] };
	const low = -Math.log(Math.max(...rates)) - 7;
	const high = -Math.log(Math.min(...rates)) + 7;
	const steps = Math.ceil((high - low) / 0.1);
	let best = 0;
	let most = -Infinity;
	for (let k = 0; k <= steps; k++) {
		const value = height(low + (k * (high - low)) / steps);
		if (value > most) [best, most] = [k, value];
	}
	const at = (k: number) => low + (k * (high - low)) / steps;
	const lnTau = goldenSection(height, at(Math.max(0, best - 1)), at(Math.min(steps, best + 1)));
	return { residenceS: Math.exp(lnTau), value: height(lnTau) };
}

function goldenSection(f: (x: number) => number, low: number, high: number): number {
	const ratio = (Math.sqrt(5) - 1) / 2;
	let [a, b] = [high - ratio * (high - low), low + ratio * (high - low)];
	let [fa, fb] = [f(a), f(b)];
	for (let i = 0; i < 60 && high - low > 1e-9; i++) {
		if (fa >= fb) {
			high = b;
			[b, fb] = [a, fa];
			a = high - ratio * (high - low);
			fa = f(a);
		} else {
			low = a;
			[a, fa] = [b, fb];
			b = low + ratio * (high - low);
			fb = f(b);
		}
	}
	return (low + high) / 2;
}
