/**
 * A measured temperature as a chain of ramps: thinned to few lines, read at any time, cut into pieces of small change.
 *
 * Source: Douglas & Peucker, Cartographica 10 (1973) 112 (thinning).
 */

/** Largest change of temperature within one piece, K. */
const PIECE_K = 0.75;
/** A log is thinned to a chain of lines that stay this close to it, K. */
const THIN_K = 0.05;

export class TemperatureChain {
	private readonly times: Float64Array;
	private readonly temperatures: Float64Array;

	/** @param log recorded times in s, ascending, and K */
	constructor(log: { timesS: Float64Array; temperaturesK: Float64Array }) {
		const kept = thin(log.timesS, log.temperaturesK, THIN_K);
		this.times = kept.times;
		this.temperatures = kept.temperatures;
	}

	/** Where the piece that begins at t ends: at the next bend of the log, or after 0.75 K. */
	pieceEnd(t: number): number {
		const { times: logTimes, temperatures: logTemperatures } = this;
		const last = logTimes.length - 1;
		if (t >= logTimes[last]) return Infinity;
		if (t < logTimes[0]) return logTimes[0];
		let i = 0;
		let high = last;
		while (high - i > 1) {
			const middle = (i + high) >> 1;
			if (logTimes[middle] <= t) i = middle;
			else high = middle;
		}
		const span = logTimes[i + 1] - logTimes[i];
		const change = Math.abs(logTemperatures[i + 1] - logTemperatures[i]);
		const pieces = Math.max(1, Math.ceil(change / PIECE_K));
		const done = Math.floor(((t - logTimes[i]) / span) * pieces + 1e-9);
		return done + 1 >= pieces ? logTimes[i + 1] : logTimes[i] + (span * (done + 1)) / pieces;
	}

	/** K at a time in s; the first and last value hold outside the log. */
	at(t: number): number {
		const { times: logTimes, temperatures: logTemperatures } = this;
		const last = logTimes.length - 1;
		if (t <= logTimes[0]) return logTemperatures[0];
		if (t >= logTimes[last]) return logTemperatures[last];
		let i = 0;
		let high = last;
		while (high - i > 1) {
			const middle = (i + high) >> 1;
			if (logTimes[middle] <= t) i = middle;
			else high = middle;
		}
		const part = (t - logTimes[i]) / (logTimes[i + 1] - logTimes[i]);
		return logTemperatures[i] + part * (logTemperatures[i + 1] - logTemperatures[i]);
	}
}

/** A chain of lines through some of the points that stays within `tolerance` of all of them (Douglas & Peucker 1973). */
export function thin(
	times: Float64Array,
	temperatures: Float64Array,
	tolerance: number
): { times: Float64Array; temperatures: Float64Array } {
	const keep = new Uint8Array(times.length);
	keep[0] = keep[times.length - 1] = 1;
	const spans: [number, number][] = [[0, times.length - 1]];
	for (let span = spans.pop(); span; span = spans.pop()) {
		const [a, b] = span;
		const slope = (temperatures[b] - temperatures[a]) / (times[b] - times[a] || 1);
		let worst = tolerance;
		let at = -1;
		for (let i = a + 1; i < b; i++) {
			const off = Math.abs(temperatures[i] - temperatures[a] - slope * (times[i] - times[a]));
			if (off > worst) {
				worst = off;
				at = i;
			}
		}
		if (at < 0) continue;
		keep[at] = 1;
		spans.push([a, at], [at, b]);
	}
	const kept = Array.from(times.keys()).filter((i) => keep[i] && (i === 0 || times[i] > times[i - 1]));
	return {
		times: Float64Array.from(kept, (i) => times[i]),
		temperatures: Float64Array.from(kept, (i) => temperatures[i])
	};
}
