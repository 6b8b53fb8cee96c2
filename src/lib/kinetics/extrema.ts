/**
 * Extrema of a species, or of a weighted sum of species, along a curve: all of them, with the flat span round the highest.
 *
 * Problem: at which times does g(t) = Σ w_i c_i(t) turn, and how long may the quench wait before a percent of the maximum is
 * gone? The turning points are the sign changes of g′ on the track (none missed, see `track.ts` and `sign-segments.ts`),
 * polished with the solution's own slope; the span is where g ≥ 0.99 g_max holds without a break round the maximum.
 *
 * | symbol | name here |
 * | --- | --- |
 * | w_i | `weights`, in species order |
 * | g_max | `Maximum.value` |
 *
 * Check values: A → B → C has t = ln(k1/k2)/(k1 − k2) and B_max = (k1/k2)^(−k2/(k1−k2)) (O. Levenspiel, Chemical Reaction
 * Engineering, 3rd ed. 1999, ch. 8).
 */
import { formAt, trackOf, type Track } from './track';
import { signSegments, slopeSegments } from './sign-segments';
import type { Solution } from './types';

export interface Extremum {
	kind: 'maximum' | 'minimum';
	timeS: number;
	/** mol/L (times the weights). */
	value: number;
}

/**
 * `interior`: a true maximum. `at start`: it only falls from its value in the charge. `at end`: it rises towards its final
 * value, which it never quite has (`timeS` Infinity), or to the horizon. `constant`: it never changes, or is never there.
 */
export interface Maximum {
	kind: 'interior' | 'at start' | 'at end' | 'constant';
	timeS: number;
	value: number;
	/** First and last time within 1 % of the maximum, without a break; the last is Infinity where it stays. */
	withinOnePercent: [number, number];
}

/** A species by its place, or weights over all species. */
export type Target = number | ArrayLike<number>;

export function weightsOf(target: Target, n: number): ArrayLike<number> {
	if (typeof target !== 'number') return target;
	if (!(target >= 0 && target < n))
		throw new RangeError(`Species ${target} is not among the ${n} of the curve.`);
	const weights = new Float64Array(n);
	weights[target] = 1;
	return weights;
}

/** Every interior extremum in order of time. @param horizonS latest time that counts, s; Infinity where left out */
export function extremaOf(solution: Solution, target: Target, horizonS = Infinity): Extremum[] {
	const weights = weightsOf(target, solution.n);
	const track = trackOf(solution, horizonS);
	return turnsOn(track, weights).map((turn) => {
		const timeS = polish(solution, weights, turn);
		return { kind: turn.kind, timeS, value: weighted(weights, solution.at(timeS)) };
	});
}

/** A turning point with the stretch round it in which the slope is lost in rounding. */
interface Turn extends Extremum {
	between: [number, number];
}

/** Every interior extremum of a track; times as good as the track's polynomials. */
export function extremaOn(track: Track, weights: ArrayLike<number>): Extremum[] {
	return turnsOn(track, weights).map(({ kind, timeS, value }) => ({ kind, timeS, value }));
}

function turnsOn(track: Track, weights: ArrayLike<number>): Turn[] {
	const segments = slopeSegments(track, weights).filter((s) => s.sign !== 0);
	const found: Turn[] = [];
	for (let i = 1; i < segments.length; i++) {
		if (segments[i].sign === segments[i - 1].sign) continue;
		const gap = segments[i].from - segments[i - 1].to;
		const timeS = gap > 0 ? segments[i - 1].to + gap / 2 : segments[i].from;
		found.push({
			kind: segments[i - 1].sign > 0 ? 'maximum' : 'minimum',
			timeS,
			value: formAt(track, weights, 0, timeS),
			between: [segments[i - 1].to, segments[i].from]
		});
	}
	return found;
}

/** The highest value that a species (or weighted sum) takes, when, and how long it stays within 1 % of it. */
export function timeOfMaximum(solution: Solution, target: Target, horizonS = Infinity): Maximum {
	const weights = weightsOf(target, solution.n);
	const track = trackOf(solution, horizonS);
	const best = maximumOn(track, weights);
	if (best.kind !== 'interior') return best;
	const turn = turnsOn(track, weights).find((t) => t.timeS === best.timeS);
	const timeS = turn ? polish(solution, weights, turn) : best.timeS;
	return { ...best, timeS, value: weighted(weights, solution.at(timeS)) };
}

/** The same on a track that is at hand. */
export function maximumOn(track: Track, weights: ArrayLike<number>): Maximum {
	const start = formAt(track, weights, 0, 0);
	const endTime = track.beyond ? Infinity : track.endS;
	const end = formAt(track, weights, 0, endTime);
	let scale = Math.max(Math.abs(start), Math.abs(end));
	let best: Maximum = { kind: 'at start', timeS: 0, value: start, withinOnePercent: [0, 0] };
	let turns = 0;
	for (const { kind, timeS, value } of extremaOn(track, weights)) {
		turns++;
		scale = Math.max(scale, Math.abs(value));
		if (kind === 'maximum' && value > best.value * (1 + 1e-14))
			best = { kind: 'interior', timeS, value, withinOnePercent: [timeS, timeS] };
	}
	const tie = 1e-13 * scale;
	if (end >= best.value - tie && (end > start + tie || best.kind === 'interior'))
		best = { kind: 'at end', timeS: endTime, value: end, withinOnePercent: [0, 0] };
	if (turns === 0 && Math.abs(end - start) <= tie)
		return { kind: 'constant', timeS: 0, value: start, withinOnePercent: [0, endTime] };
	return { ...best, withinOnePercent: flatSpan(track, weights, best) };
}

function flatSpan(track: Track, weights: ArrayLike<number>, best: Maximum): [number, number] {
	const limit = best.value - 0.01 * Math.abs(best.value);
	const spans = signSegments(track, { weights, constant: -limit }).filter((s) => s.sign >= 0);
	const at = Math.min(best.timeS, Number.MAX_VALUE);
	const span = spans.find((s) => s.from <= at && at <= s.to) ?? { from: best.timeS, to: best.timeS };
	return [span.from, span.to];
}

function weighted(weights: ArrayLike<number>, c: Float64Array): number {
	let sum = 0;
	for (let i = 0; i < c.length; i++) if (weights[i] !== 0) sum += weights[i] * c[i];
	return sum;
}

/** Secant steps (Illinois) on the solution's slope inside a narrow bracket round the turning point that the track gave. */
function polish(solution: Solution, weights: ArrayLike<number>, { kind, timeS, between }: Turn): number {
	const out = new Float64Array(solution.n);
	const slope = (t: number) => weighted(weights, solution.slope(t, out)) * (kind === 'maximum' ? 1 : -1);
	let [low, high] = between;
	let valueLow = 0;
	let valueHigh = 0;
	for (let reach = 1e-9; reach < 0.02 && !(valueLow > 0 && valueHigh < 0); reach *= 10) {
		low = between[0] * (1 - reach);
		high = between[1] * (1 + reach);
		valueLow = slope(low);
		valueHigh = slope(high);
	}
	if (!(valueLow > 0 && valueHigh < 0)) return timeS;
	let side = 0;
	for (let i = 0; i < 200; i++) {
		let t = (low * valueHigh - high * valueLow) / (valueHigh - valueLow);
		if (!(t > low && t < high) || i % 4 === 3) t = low + (high - low) / 2;
		if (t <= low || t >= high) break;
		const value = slope(t);
		if (value === 0) return t;
		if (value > 0) {
			low = t;
			valueLow = value;
			if (side === 1) valueHigh /= 2;
			side = 1;
		} else {
			high = t;
			valueHigh = value;
			if (side === -1) valueLow /= 2;
			side = -1;
		}
	}
	return low + (high - low) / 2;
}
