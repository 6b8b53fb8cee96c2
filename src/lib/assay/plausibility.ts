/** The sentences that let the lab recognise its run, and so catch a wrong time unit. */
import type { ChannelContent } from '$lib/schemas/run';
import type { TimeUnit } from '$lib/schemas/sheet';
import type { Point } from './timepoints';

/** "Half of A is gone after about 52 min - as seen in the lab?" The sentence that catches a wrong time unit. */
export function plausibility(points: Point[], channels: ChannelContent[], unit: TimeUnit): string[] {
	const timed = points.filter((p) => p.time !== null);
	if (timed.length < 2) return [];
	const last = timed[timed.length - 1].time ?? 0;
	const sentences: string[] = [];
	for (const c of channels) {
		const own = timed.flatMap((p) => {
			const v = p.values.get(c.id);
			return typeof v === 'number' ? [{ t: p.time ?? 0, v }] : [];
		});
		if (own.length < 2 || !(own[0].v > 0) || own[0].v !== Math.max(...own.map((o) => o.v))) continue;
		sentences.push(halfSentence(c.label ?? c.id, own, unit));
		break;
	}
	sentences.push(`The last sample was taken after ${durationWords(last, unit)}.`);
	return sentences;
}

function halfSentence(name: string, own: { t: number; v: number }[], unit: TimeUnit): string {
	const half = own[0].v / 2;
	const at = own.findIndex((o) => o.v <= half);
	if (at < 0) {
		const end = own[own.length - 1];
		return `${Math.round((end.v / own[0].v) * 100)} % of ${name} is left after ${durationWords(end.t, unit)} – as seen in the lab?`;
	}
	const [a, b] = [own[at - 1], own[at]];
	const t = a.t + ((a.v - half) / (a.v - b.v || 1)) * (b.t - a.t);
	return `Half of ${name} is gone after about ${durationWords(t, unit)} – as seen in the lab?`;
}

/** "52 min", "1.5 h", "3 d": two or three digits in the unit that reads best. */
export function durationWords(value: number, unit: TimeUnit): string {
	const seconds = value * { s: 1, min: 60, h: 3600, d: 86_400 }[unit];
	const size = Math.abs(seconds);
	const [factor, name] =
		size < 120 ? [1, 's'] : size < 7200 ? [60, 'min'] : size < 172_800 ? [3600, 'h'] : [86_400, 'd'];
	return `${Number((seconds / factor).toPrecision(3))} ${name}`;
}
