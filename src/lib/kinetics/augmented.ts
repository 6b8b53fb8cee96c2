/**
 * Linear systems with constant feeds and with collectors, as larger first-order schemes.
 *
 *     feed       d/dt [n; 1] = [[K, f], [0, 0]] [n; 1]                   (a source that is never used up)
 *     integral   d/dt [c; z₁; z₂] = [[K, 0, 0], [I/h, 0, 0], [0, I/h, 0]] [c; z₁; z₂]
 *
 * K is singular as a rule, so nothing is divided by an eigenvalue; every entry stays non-negative, so nothing cancels.
 *
 * Source: C. F. Van Loan, IEEE Trans. Automat. Control 23 (1978) 395.
 */
import type { LinearSystem } from './types';

/** The system with one more species, the source, in the last place; `feedPerS` in amount per s, zero or more. */
export function withFeed(system: LinearSystem, feedPerS: ArrayLike<number>): LinearSystem {
	const { n } = system;
	const outflow = new Float64Array(n + 1);
	outflow.set(system.outflow);
	const feeds = Array.from({ length: n }, (_, to) => ({
		from: n,
		to,
		rate: feedPerS[to],
		coefficient: 1,
		step: -1,
		direction: 'forward' as const
	}));
	return {
		n: n + 1,
		outflow,
		transfers: [...system.transfers, ...feeds.filter((feed) => feed.rate > 0)],
		...(system.flows ? { flows: system.flows } : {})
	};
}

/** The system with collectors of ∫c dt/h, and of ∫∫c dt²/h² when `levels` is 2, behind it. */
export function withCollectors(system: LinearSystem, h: number, levels: 1 | 2): LinearSystem {
	const { n } = system;
	const size = n * (levels + 1);
	const outflow = new Float64Array(size);
	outflow.set(system.outflow);
	const collectors = Array.from({ length: n * levels }, (_, i) => ({
		from: i,
		to: i + n,
		rate: 1 / h,
		coefficient: 1,
		step: -1,
		direction: 'forward' as const
	}));
	return {
		n: size,
		outflow,
		transfers: [...system.transfers, ...collectors],
		...(system.flows ? { flows: system.flows } : {})
	};
}
