/** Times and amounts of a window in words, rounded so that no more is promised than the interval holds. */
import type { Figure, FirstFormResult, Span } from '$lib/schemas/window';
import { significant } from '$lib/client/numbers';

/** Digits so that the interval's width shows in the last two. */
function digitsFor(value: number, interval: [number | null, number | null] | null): number {
	const low = interval?.[0];
	const high = interval?.[1];
	if (low == null || high == null || high <= low || value === 0) return 3;
	const lead = Math.floor(Math.log10(Math.abs(value)));
	const width = Math.floor(Math.log10((high - low) / 2));
	return Math.min(6, Math.max(2, lead - width + 2));
}

export function valueText(figure: Figure): string {
	if (figure.state === 'no end') return 'no end';
	if (figure.value === null) return 'never';
	return significant(figure.value, digitsFor(figure.value, figure.interval));
}

export function intervalText(figure: Figure): string {
	if (figure.value === null) return '';
	if (figure.interval === null) return 'no interval';
	const digits = digitsFor(figure.value, figure.interval);
	const end = (x: number | null) => (x === null ? 'open' : significant(x, digits));
	return `${end(figure.interval[0])} to ${end(figure.interval[1])}`;
}

export function spanText(span: Span, unit: string): string {
	const from = significant(span.from, 3);
	return span.to === null ? `from ${from} ${unit} on` : `${from} to ${significant(span.to, 3)} ${unit}`;
}

/** Steps of 1, 2 or 5 times a power of ten, so that at most `wanted` of them fill the axis. */
function roundStep(end: number, wanted: number): number {
	const raw = end / wanted;
	const power = 10 ** Math.floor(Math.log10(raw));
	return [1, 2, 5, 10].map((m) => m * power).find((step) => step >= raw) ?? 10 * power;
}

/** End of a time axis, at a round mark, that shows everything that happens: spans and maxima, with room. */
export function axisEnd(result: FirstFormResult): number {
	const spans = [...result.criteria.flatMap((c) => c.spans), ...(result.hold?.spans ?? [])];
	const times = [
		...spans.flatMap((s) => [s.from, s.to ?? s.from]),
		...result.maxima.filter((m) => m.kind === 'interior').map((m) => m.time.value ?? 0)
	].filter((t) => Number.isFinite(t));
	const last = Math.max(0, ...times) * 1.2;
	if (last === 0) return 1;
	const step = roundStep(last, 8);
	return Number((Math.ceil(last / step) * step).toPrecision(12));
}

/** Round marks for an axis from 0 to `end`. */
export function axisTicks(end: number, wanted = 8): number[] {
	const step = roundStep(end, wanted);
	const count = Math.floor(end / step + 1e-9);
	return Array.from({ length: count + 1 }, (_, i) => Number((i * step).toPrecision(12)));
}
