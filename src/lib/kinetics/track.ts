/**
 * A trajectory as piecewise polynomials, so that every crossing of every limit can be found, not only those that a grid hits.
 *
 * Problem: the roots of sums of exponentials (with polynomials, cosines and sines) over [0, ∞), for any number of criteria on
 * the same curve, whichever way the curve was solved. The curve is interpolated at Chebyshev points on intervals that double
 * in length, [0, h], [h, 2h], [2h, 4h], …: on [l, 2l] degree 20 represents every e^{−λt}, λ ≥ 0, to 4e-16 (see
 * `chebyshev.ts`), so about log₂(slowest/fastest) pieces serve the stiffest scheme. Oscillating loops, and anything else that
 * does not show the expected fall of its coefficients, make the piece split in two until it does. The last piece ends where
 * every species has reached its limit t → ∞ to rounding; from there the curve is that limit (e^{Kt} does not expand
 * distances in the weighted 1-norm).
 *
 * Each species is resolved relative to the largest value that it has had so far, so that a trace at early times keeps its
 * digits.
 *
 * | symbol | name here |
 * | --- | --- |
 * | l, 2l | `edges[p]`, `edges[p + 1]`, s |
 * | a_k of species i on piece p | `coefficients[(p·n + i)·SIZE + k]` |
 * | largest value so far (or rounding / 4ε, where that is more) | `scales[p·n + i]` |
 *
 * Sources: J. P. Boyd, SIAM J. Numer. Anal. 40 (2002) 1666 (roots through Chebyshev interpolants and subdivision);
 * Z. Battles and L. N. Trefethen, SIAM J. Sci. Comput. 25 (2004) 1743; error bound: Trefethen (2013), theorem 8.2.
 */
import { coefficients as interpolate, DEGREE, NODES, SIZE } from './chebyshev';
import type { Track } from './track-value';
import type { Solution } from './types';

/** Anything that has concentrations at a time. */
export interface Trajectory {
	readonly n: number;
	/** Writes into `out` (length n) when given, and returns it. */
	at(timeS: number, out?: Float64Array): Float64Array;
}

export interface TrackOptions {
	/** Latest time that counts, s; Infinity (the default) needs `final`. */
	horizonS?: number;
	/** Limit t → ∞ of every species. */
	final?: ArrayLike<number>;
	/** Upper bound on |rate| of any mode, 1/s, where known: saves a search for the first piece. */
	fastestPerS?: number;
	/** Time after which every mode is lost in rounding, s, where known; the curve then is its limit. */
	settledS?: number;
	/** Error of the trajectory itself as a fraction of the total charge. */
	error?: number;
	/** Times at which the conditions jump or their slope does (programs, shots), s. */
	breaksS?: readonly number[];
}

export type { Track } from './track-value';
export { formAt } from './track-value';

/** Relative size of the last three coefficients at which a piece counts as resolved; the error is then about 1e-16. */
const RESOLVED = 6e-15;
/** Relative distance from the limit at which the curve has arrived. */
const ARRIVED = 4e-15;
const EPSILON = 2.220446049250313e-16;
const MOST_PIECES = 20_000;

/** The track of a closed-form solution up to a horizon, or for ever. */
export function trackOf(solution: Solution, horizonS = Infinity): Track {
	// Where the closed form was not accepted its modes are indicative only: a slow one may be lost in rounding.
	const vouched = solution.method !== 'uniformisation' && solution.method !== 'extended';
	let fastestPerS = 0;
	let slowestS = 0;
	let repeats = 1;
	for (const { re, im, timeConstantS, multiplicity } of solution.modes) {
		fastestPerS = Math.max(fastestPerS, Math.hypot(re, im));
		if (Number.isFinite(timeConstantS)) slowestS = Math.max(slowestS, timeConstantS);
		repeats = Math.max(repeats, multiplicity);
	}
	return track(solution, {
		horizonS,
		final: solution.final,
		error: solution.errorEstimate,
		...(fastestPerS > 0 ? { fastestPerS } : {}),
		// t^m e^{−t/τ} needs longer: 36 + m ln 60 is more than enough for a rounding of 2e-16.
		...(vouched && slowestS > 0 ? { settledS: (40 + 5 * repeats) * slowestS } : {})
	});
}

/**
 * The track of any trajectory.
 * @throws RangeError when the horizon is not above 0, or is infinite without a finite limit t → ∞.
 */
export function track(trajectory: Trajectory, options: TrackOptions = {}): Track {
	return new TrackBuilder(trajectory, options).build();
}

class TrackBuilder {
	private readonly n: number;
	private readonly horizon: number;
	private readonly final: Float64Array | null;
	private readonly breaks: number[];
	private edges: number[] = [0];
	private store = new Float64Array(0);
	private scaleStore: number[] = [];
	private readonly values: Float64Array;
	private readonly piece: Float64Array;
	private readonly running: Float64Array;
	private readonly here: Float64Array;
	private readonly start: Float64Array;
	private readonly settled: number;
	/** Rounding of each species' values, found where the coefficients stop falling, mol/L. */
	private readonly floor: Float64Array;
	/** Last coefficients before the piece was halved. */
	private readonly before: Float64Array;
	private total = 0;

	constructor(
		private readonly trajectory: Trajectory,
		private readonly options: TrackOptions
	) {
		this.n = trajectory.n;
		this.horizon = options.horizonS ?? Infinity;
		if (!(this.horizon > 0))
			throw new RangeError(`A horizon above 0 s is expected; found ${this.horizon} s.`);
		const final = options.final ? Float64Array.from(options.final) : null;
		this.final = final?.every(Number.isFinite) ? final : null;
		if (this.horizon === Infinity && !this.final)
			throw new RangeError('Without a horizon the curve needs a finite limit. Give a latest time.');
		this.breaks = [...(options.breaksS ?? [])].filter((t) => t > 0 && t < this.horizon).sort((a, b) => a - b);
		this.values = new Float64Array(SIZE * this.n);
		this.piece = new Float64Array(SIZE * this.n);
		this.running = new Float64Array(this.n);
		this.floor = new Float64Array(this.n);
		this.before = new Float64Array(this.n).fill(Infinity);
		this.settled = options.settledS ?? Infinity;
		this.start = trajectory.at(0).slice();
		this.here = this.start.slice();
	}

	build(): Track {
		let arrived = this.arrived();
		for (const end of [...this.breaks, this.horizon]) {
			if (arrived && this.breaks.length === 0) break;
			arrived = this.segment(this.edges[this.edges.length - 1], end);
		}
		const endS = this.edges[this.edges.length - 1];
		return {
			n: this.n,
			pieces: this.edges.length - 1,
			edges: Float64Array.from(this.edges),
			coefficients: this.store.subarray(0, (this.edges.length - 1) * this.n * SIZE),
			scales: Float64Array.from(this.scaleStore),
			start: this.start,
			endS: arrived && this.final ? endS : Math.min(endS, this.horizon),
			beyond: arrived ? this.final : null
		};
	}

	/** Pieces from `start` to `end` (a break or the horizon); true when the limit was reached in the last segment. */
	private segment(start: number, end: number): boolean {
		let left = start;
		let width = Math.min(this.firstWidth(), end - start);
		let splits = 0;
		while (left < end) {
			if (this.edges.length > MOST_PIECES)
				throw new RangeError(
					`The curve could not be followed beyond ${left} s. Give an earlier latest time.`
				);
			const right = left + width > end * (1 - 1e-12) ? end : left + width;
			if (!this.resolve(left, right) && splits < 60) {
				width = (right - left) / 2;
				splits++;
				continue;
			}
			this.keep(right);
			if (end === this.horizon && this.final && (this.arrived() || right >= this.settled)) return true;
			if (splits > 0) splits--;
			left = right;
			width = Math.min(2 * width, Math.max(right - start, width));
		}
		return false;
	}

	private firstWidth(): number {
		if (this.options.fastestPerS) return 3 / this.options.fastestPerS;
		const finite = Number.isFinite(this.horizon) ? this.horizon : 1e6;
		return this.breaks.length > 0 ? finite / 8 : finite;
	}

	/** Interpolates one piece; true when the last coefficients of every species are down to rounding. */
	private resolve(left: number, right: number): boolean {
		const { n, values, piece, running, floor, before } = this;
		const middle = (left + right) / 2;
		const half = (right - left) / 2;
		for (let j = 0; j < SIZE; j++) {
			const t = j === 0 ? right : j === DEGREE ? left : middle + half * NODES[j];
			this.trajectory.at(t, values.subarray(j * n, (j + 1) * n));
		}
		let resolved = true;
		for (let i = 0; i < n; i++) {
			interpolate(values, i, n, piece, i * SIZE);
			let largest = running[i];
			for (let j = 0; j < SIZE; j++) largest = Math.max(largest, Math.abs(values[j * n + i]));
			this.total = Math.max(this.total, largest);
			const end = i * SIZE + DEGREE;
			const last = Math.abs(piece[end]) + Math.abs(piece[end - 1]) + Math.abs(piece[end - 2]);
			if (last > Math.max(RESOLVED * largest, floor[i])) {
				resolved = false;
				// Halving a smooth curve takes 2^18 off its last coefficients; what stays is the trajectory's own rounding.
				const rounding = last > before[i] / 4 && (last < 1e-11 * largest || last < 1e-13 * this.total);
				if (rounding) floor[i] = 2 * last;
			}
			before[i] = last;
		}
		return resolved;
	}

	private keep(right: number): void {
		const { n, values, piece, running } = this;
		const at = (this.edges.length - 1) * n * SIZE;
		if (at + n * SIZE > this.store.length) {
			const larger = new Float64Array(Math.max(16 * n * SIZE, 2 * this.store.length));
			larger.set(this.store);
			this.store = larger;
		}
		this.store.set(piece, at);
		for (let i = 0; i < n; i++) {
			for (let j = 0; j < SIZE; j++) running[i] = Math.max(running[i], Math.abs(values[j * n + i]));
			this.scaleStore.push(Math.max(running[i], this.floor[i] / (4 * EPSILON)));
			this.before[i] = Infinity;
			this.here[i] = values[i];
		}
		this.edges.push(right);
	}

	private arrived(): boolean {
		const { final, here, running, n } = this;
		if (!final) return false;
		const near = this.settled < Infinity ? 1e-15 : Math.max(1e-15, Math.min(this.options.error ?? 0, 1e-12));
		let total = 0;
		for (let i = 0; i < n; i++) total = Math.max(total, Math.abs(here[i]), running[i]);
		for (let i = 0; i < n; i++) {
			const scale = Math.max(running[i], Math.abs(here[i]));
			if (Math.abs(here[i] - final[i]) > ARRIVED * scale + near * total) return false;
		}
		return true;
	}
}
