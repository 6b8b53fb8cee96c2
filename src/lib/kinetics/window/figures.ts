/**
 * From the values of one figure over all draws to its interval and one-sided bounds.
 *
 * Order statistics, Hazen's position p·N + ½ (R. J. Hyndman and Y. Fan, Am. Stat. 50 (1996) 361, type 5). A draw in which a
 * time does not exist counts on the adverse side (an opening that never comes is late, a closing that never was is early), so
 * a bound is open when too many draws lack it.
 */
import type { Figure } from '../../schemas/window';

/** A figure's values: `never` marks draws without it. Infinity stands for "no end". */
export interface FigureDraws {
	/** At the estimates; NaN: never. */
	nominal: number;
	/** NaN: never; NaN draws that were left out are not in here. */
	values: Float64Array;
	/** Where a draw without this figure counts: late for openings, early for closings and lengths. */
	missing: 'late' | 'early';
	firstOrder: [number, number] | null;
}

/** @param scale what a figure in SI is divided by for the answer's unit */
export function figureOf(draws: FigureDraws, confidence: number, scale: number): Figure {
	const { nominal, values, missing } = draws;
	const sorted = Float64Array.from(values, (v) =>
		Number.isNaN(v) ? (missing === 'late' ? Infinity : -Infinity) : v
	);
	sorted.sort();
	let never = 0;
	for (const value of values) if (Number.isNaN(value)) never++;
	const has = values.length > 0;
	const at = (p: number): number | null => (has ? finite(quantile(sorted, p), scale) : null);
	const tail = (1 - confidence) / 2;
	return {
		state: Number.isNaN(nominal) ? 'never' : nominal === Infinity ? 'no end' : 'reached',
		value: finite(nominal, scale),
		interval: has ? [at(tail), at(1 - tail)] : null,
		lower: at(1 - confidence),
		upper: at(confidence),
		neverPercent: has ? (100 * never) / values.length : Number.isNaN(nominal) ? 100 : 0,
		firstOrder: draws.firstOrder && [draws.firstOrder[0] / scale, draws.firstOrder[1] / scale]
	};
}

const finite = (value: number, scale: number): number | null =>
	Number.isFinite(value) ? value / scale : null;

/** Quantile of sorted values; infinite neighbours are not averaged with finite ones. */
export function quantile(sorted: Float64Array, p: number): number {
	const position = Math.min(Math.max(p * sorted.length - 0.5, 0), sorted.length - 1);
	const low = Math.floor(position);
	const high = Math.min(low + 1, sorted.length - 1);
	const share = position - low;
	if (share === 0 || sorted[low] === sorted[high]) return sorted[low];
	return sorted[low] + share * (sorted[high] - sorted[low]);
}

/** Two significant digits downwards (a closing) or upwards (an opening): 37.8 → 37, 0.526 → 0.52, 3.84 → 3.9. */
export function roundTwoDigits(value: number, towards: 'down' | 'up'): number {
	if (value === 0 || !Number.isFinite(value)) return value;
	const decimals = 1 - Math.floor(Math.log10(Math.abs(value)));
	const scaled = decimals >= 0 ? value * 10 ** decimals : value / 10 ** -decimals;
	const whole = towards === 'down' ? Math.floor(scaled * (1 + 1e-12)) : Math.ceil(scaled * (1 - 1e-12));
	return Number((decimals >= 0 ? whole / 10 ** decimals : whole * 10 ** -decimals).toPrecision(12));
}

/**
 * The widest part [a, b] of a span that lies inside the draws' spans in the asked share of all draws: opening and closing are
 * moved in by equal shares of the draws until it does. Null: none.
 */
export function robustSpan(
	openings: Float64Array,
	closings: Float64Array,
	confidence: number
): [number, number] | null {
	const n = openings.length;
	if (n === 0) return null;
	const late = Float64Array.from(openings, (v) => (Number.isNaN(v) ? Infinity : v)).sort();
	const early = Float64Array.from(closings, (v) => (Number.isNaN(v) ? -Infinity : v)).sort();
	const covered = (a: number, b: number): number => {
		let inside = 0;
		for (let d = 0; d < n; d++) if (openings[d] <= a && closings[d] >= b) inside++;
		return inside / n;
	};
	let best: [number, number] | null = null;
	let low = 0;
	let high = 1 - confidence;
	for (let i = 0; i < 30; i++) {
		const share = i === 0 ? high : (low + high) / 2;
		const a = quantile(late, 1 - share);
		const b = quantile(early, share);
		if (a < b && covered(a, b) >= confidence - 0.5 / n) {
			best = [a, b];
			low = share;
			if (i === 0) break;
		} else high = share;
	}
	return best;
}
