/** The time ruler: a logarithmic axis of time, with its marks kept apart. */
import { significant } from '$lib/client/numbers';

export interface RulerScale {
	lowS: number;
	highS: number;
	/** Every tick, as a share of the length; decades are long and carry words. */
	ticks: { at: number; long: boolean; words: string }[];
	/** Place of a time as a share of the length, held inside the ruler. */
	at: (timeS: number) => number;
}

/** Covers every time given, with at least two decades, beginning and ending at a full decade of `unitS`. */
export function rulerScale(timesS: readonly number[], unitS: number): RulerScale {
	const known = timesS.filter((t) => Number.isFinite(t) && t > 0);
	const low = known.length ? Math.min(...known) : unitS / 10;
	const high = known.length ? Math.max(...known) : unitS * 10;
	let from = Math.floor(Math.log10(low / unitS) - 0.15);
	let to = Math.ceil(Math.log10(high / unitS) + 0.15);
	while (to - from < 3) {
		if ((to - from) % 2) from--;
		else to++;
	}
	const decades = to - from;
	const share = (timeS: number) => (Math.log10(timeS / unitS) - from) / decades;
	// Very long rulers keep only the decades.
	const steps = decades > 8 ? [1] : [1, 2, 3, 4, 5, 6, 7, 8, 9];
	const ticks: RulerScale['ticks'] = [];
	for (let e = from; e <= to; e++)
		for (const m of e === to ? [1] : steps) {
			const timeS = m * 10 ** e * unitS;
			ticks.push({ at: share(timeS), long: m === 1, words: m === 1 ? decadeWords(timeS) : '' });
		}
	return {
		lowS: 10 ** from * unitS,
		highS: 10 ** to * unitS,
		ticks,
		at: (timeS) => Math.min(1, Math.max(0, share(timeS)))
	};
}

/** A full decade in the unit that keeps it short: 36 s, 6 min, 1 h, 100 h, 42 d. */
function decadeWords(timeS: number): string {
	const [unit, seconds] =
		timeS < 59 ? ['s', 1] : timeS < 3599 ? ['min', 60] : timeS < 3600 * 999 ? ['h', 3600] : ['d', 86400];
	const value = timeS / Number(seconds);
	return `${value >= 0.01 && value < 1e5 ? String(Number(value.toPrecision(2))) : significant(value, 1)} ${unit}`;
}

export interface Placed {
	/** Middle of the mark, px. */
	x: number;
	/** 0 is the row nearest the ruler. */
	row: number;
	side: 'left' | 'right';
}

const ROWS = 7;

/** Row and side of each label so that no two overlap; widths in px. */
export function placeLabels(marks: readonly { x: number; width: number }[], length: number): Placed[] {
	const order = marks.map((m, i) => ({ ...m, i })).sort((a, b) => a.x - b.x);
	const taken: { from: number; to: number; row: number }[] = [];
	const out = new Array<Placed>(marks.length);
	const free = (from: number, to: number, row: number) =>
		from >= -4 && to <= length + 4 && !taken.some((t) => t.row === row && t.from < to && from < t.to);
	for (const mark of order) {
		const right = { from: mark.x - 4, to: mark.x + 10 + mark.width };
		const left = { from: mark.x - 10 - mark.width, to: mark.x + 4 };
		const nearFirst = mark.x < length / 2 ? [left, right] : [right, left];
		const crossed = (span: { from: number; to: number }) =>
			order.some((other) => other.i !== mark.i && other.x > span.from && other.x < span.to);
		const candidates = Array.from({ length: ROWS }, (_, row) =>
			nearFirst.map((span) => ({ ...span, row }))
		).flat();
		const open = candidates.filter((c) => free(c.from, c.to, c.row));
		const chosen = open.find((c) => !crossed(c)) ?? open[0] ?? { ...right, row: ROWS };
		taken.push(chosen);
		out[mark.i] = { x: mark.x, row: chosen.row, side: chosen.to === left.to ? 'left' : 'right' };
	}
	return out;
}
