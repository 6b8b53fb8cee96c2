import {
	firstFormRequest,
	type FirstFormRequest,
	type FirstFormResult,
	type HoldSpan
} from '$lib/schemas/window';

/** What a recipe takes from a window: the span of time in which every criterion holds, at one temperature. */
export interface WindowFacts {
	temperatureC: number;
	/** Hours; an end that is open is null. At the estimates. */
	fromH: number | null;
	toH: number | null;
	/** The same at the adverse one-sided bound of the parameters; null where none could be computed. */
	fromBoundH: number | null;
	toBoundH: number | null;
	/** Criterion that sets each end, in words. */
	fromBinds: string;
	toBinds: string;
	confidencePercent: number;
}

const HOURS = { s: 1 / 3600, min: 1 / 60, h: 1, d: 24 } as const;

const isFirstForm = (result: unknown): result is FirstFormResult =>
	typeof result === 'object' && result !== null && (result as { kind?: unknown }).kind === 'first form';

const longest = (spans: HoldSpan[]): HoldSpan | null =>
	[...spans].sort((a, b) => (b.to ?? Infinity) - b.from - ((a.to ?? Infinity) - a.from))[0] ?? null;

/** Null where the window's result is of a kind that gives no hold, or no time meets every criterion. */
export function windowFacts(result: unknown): WindowFacts | null {
	if (!isFirstForm(result) || !result.hold) return null;
	const span = longest(result.hold.spans);
	if (!span) return null;
	const hours = (value: number | null | undefined) =>
		value === null || value === undefined ? null : value * HOURS[result.timeUnit];
	const text = (index: number | null) => (index === null ? '' : (result.criteria[index]?.text ?? ''));
	return {
		temperatureC: result.temperatureC,
		fromH: hours(span.from),
		toH: hours(span.to),
		fromBoundH: hours(result.hold.from.upper),
		toBoundH: hours(result.hold.to.lower),
		fromBinds: text(span.bindsFrom),
		toBinds: text(span.bindsTo),
		confidencePercent: Math.round(result.confidenceLevel * 1000) / 10
	};
}

/** The charge that the window was computed for; empty where its input says none. */
export function windowCharge(input: unknown): FirstFormRequest['charge'] {
	const parsed = firstFormRequest.shape.charge.safeParse((input as { charge?: unknown } | null)?.charge);
	return parsed.success ? parsed.data : {};
}
