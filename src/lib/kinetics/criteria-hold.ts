/**
 * When criteria hold: all spans of time, the criterion that binds at each edge, and why one is never met.
 *
 * Problem: criterion j holds where g_j(c(t)) ≤ 0; the batch may be stopped while all hold. The sign of every g_j is known along
 * the whole track (`sign-segments.ts`), so the spans follow by intersection, and nothing between grid points is missed.
 * At a zero that only touches, equality holds for that instant alone: it is reported as a touch and makes no span. A limit
 * that is only approached as t → ∞ is never met.
 *
 * | symbol | name here |
 * | --- | --- |
 * | g_j | `Criterion.weights`, `Criterion.constant` |
 */
import type { Criterion } from './criteria';
import { maximumOn } from './extrema';
import { signSegments } from './sign-segments';
import { formAt, trackOf, type Track } from './track';
import type { Solution } from './types';

/** [from, to] in s; `to` is Infinity where the span has no end. */
export type TimeSpan = [number, number];

export interface CriterionSpans {
	spans: TimeSpan[];
	/** Instants at which the limit is just touched, without a span. */
	touchesS: number[];
	/** First time at which it holds; null: never. */
	firstS: number | null;
	/** Null where it holds at some time. */
	never: NeverMet | null;
}

/** Where a criterion that is never met comes closest. */
export interface NeverMet {
	/** `equilibrium` and `final`: as t → ∞; `turn`: at an extremum; `start`: in the charge; `horizon`: at the latest time. */
	where: 'equilibrium' | 'final' | 'turn' | 'start' | 'horizon';
	timeS: number;
	/** The limited quantity there, in the criterion's unit. */
	value: number;
}

export interface HoldSpan {
	fromS: number;
	toS: number;
	/** Which criterion (by place) sets the edge; null for the start, the horizon, or no end. */
	bindsFrom: number | null;
	bindsTo: number | null;
}

export interface HoldTimes {
	/** Every span in which all criteria hold. */
	spans: HoldSpan[];
	firstS: number | null;
	perCriterion: CriterionSpans[];
}

/** All spans in which every criterion holds. @param horizonS latest time that counts, s; Infinity where left out */
export function holdIntervals(
	solution: Solution,
	criteria: readonly Criterion[],
	horizonS = Infinity
): HoldTimes {
	return holdIntervalsOn(trackOf(solution, horizonS), criteria);
}

/** The same on a track that is at hand. */
export function holdIntervalsOn(track: Track, criteria: readonly Criterion[]): HoldTimes {
	const perCriterion = criteria.map((criterion) => criterionSpans(track, criterion));
	const spans = intersect(perCriterion.map((c) => c.spans));
	return { spans, firstS: spans.length > 0 ? spans[0].fromS : null, perCriterion };
}

/** First time at which a criterion holds, or where it comes closest. */
export function timeTo(solution: Solution, criterion: Criterion, horizonS = Infinity): CriterionSpans {
	return criterionSpans(trackOf(solution, horizonS), criterion);
}

/** Spans of one criterion on a track. */
export function criterionSpans(track: Track, criterion: Criterion): CriterionSpans {
	const segments = signSegments(track, criterion);
	const spans: TimeSpan[] = [];
	const touchesS: number[] = [];
	segments.forEach((segment, i) => {
		let sign: number = segment.sign;
		const before = segments[i - 1];
		const after = segments[i + 1];
		if (sign === 0) {
			sign = after ? after.sign : before ? before.sign : -1;
			if (before && after && before.sign > 0 && after.sign > 0)
				touchesS.push(segment.from + (segment.to - segment.from) / 2);
			// Between a span that holds and one that does not there is no zero segment left; here both neighbours agree.
			if (before && before.sign < 0) sign = -1;
		}
		if (sign > 0) return;
		const last = spans[spans.length - 1];
		if (last && last[1] === segment.from) last[1] = segment.to;
		else spans.push([segment.from, segment.to]);
	});
	const first = spans.length > 0 ? spans[0][0] : null;
	const touched = touchesS.length > 0 ? touchesS[0] : null;
	const firstS = first === null ? touched : touched === null ? first : Math.min(first, touched);
	return { spans, touchesS, firstS, never: firstS === null ? closest(track, criterion) : null };
}

function closest(track: Track, criterion: Criterion): NeverMet {
	const best = maximumOn(
		track,
		Float64Array.from(criterion.weights, (w) => -w)
	);
	const c = Float64Array.from({ length: track.n }, (_, i) => {
		const unit = new Float64Array(track.n);
		unit[i] = 1;
		return formAt(track, unit, 0, best.timeS);
	});
	const value = criterion.value(c);
	if (best.kind === 'at end' && best.timeS === Infinity)
		return { where: criterion.reversible ? 'equilibrium' : 'final', timeS: Infinity, value };
	if (best.kind === 'at end') return { where: 'horizon', timeS: best.timeS, value };
	return { where: best.kind === 'interior' ? 'turn' : 'start', timeS: best.timeS, value };
}

function intersect(lists: TimeSpan[][]): HoldSpan[] {
	if (lists.length === 0) return [];
	const next = lists.map(() => 0);
	const out: HoldSpan[] = [];
	for (;;) {
		let from = 0;
		let to = Infinity;
		let bindsFrom: number | null = null;
		let bindsTo: number | null = null;
		for (let j = 0; j < lists.length; j++) {
			const span = lists[j][next[j]];
			if (!span) return out;
			if (span[0] > from) [from, bindsFrom] = [span[0], j];
			if (span[1] < to) [to, bindsTo] = [span[1], j];
		}
		if (from < to) out.push({ fromS: from, toS: to, bindsFrom, bindsTo });
		let advanced = -1;
		let earliest = Infinity;
		for (let j = 0; j < lists.length; j++)
			if (lists[j][next[j]][1] < earliest) [earliest, advanced] = [lists[j][next[j]][1], j];
		if (advanced < 0) return out;
		next[advanced]++;
	}
}

/** "1.98 h", "12.5 min": a time in words, four significant digits. */
export function timeText(timeS: number): string {
	const [unit, size] =
		timeS >= 2 * 86_400
			? ['d', 86_400]
			: timeS >= 3_600
				? ['h', 3_600]
				: timeS >= 90
					? ['min', 60]
					: ['s', 1];
	return `${Number((timeS / size).toPrecision(4))} ${unit}`;
}

/** "equilibrium at 25.0 % of charge", "highest value 74.30 % of charge, at 1.980 h". */
export function describeNever(
	criterion: Criterion,
	never: NeverMet,
	time: (s: number) => string = timeText
): string {
	const value = Number.isFinite(never.value)
		? `${threeDigits(never.value)}${criterion.unitText}`
		: 'no value';
	switch (never.where) {
		case 'equilibrium':
			return `equilibrium at ${value}`;
		case 'final':
			return `it ends at ${value}`;
		case 'turn':
			return `it comes no closer than ${value}, at ${time(never.timeS)}`;
		case 'start':
			return `it is closest in the charge, at ${value}, and moves away`;
		case 'horizon':
			return `at the latest time, ${time(never.timeS)}, it is at ${value}`;
	}
}

/** Three significant digits, zeros kept: 25.0, 0.100, 3.48. Small numbers as powers of ten. */
export function threeDigits(value: number): string {
	const size = Math.abs(value);
	if (size === 0) return '0';
	if (size >= 1e5 || size < 1e-4) return value.toExponential(2);
	return size >= 100 ? String(Number(value.toPrecision(3))) : value.toPrecision(3);
}
