/**
 * Where a function on a track is above, below and at zero: all of its sign changes, none missed.
 *
 * Problem: zeros of g(t) = Σ w_i c_i(t) + constant. On each polynomial piece the Bernstein coefficients b_i bound g from both
 * sides, and their sign changes bound the number of zeros (Descartes' rule of signs; the parity is exact): none means no zero,
 * one means exactly one. Otherwise the piece is cut in two (de Casteljau) and asked again. Values within rounding of zero
 * (|b_i| ≤ ε for all i) make a segment of sign 0: that is where g touches zero, or lies on it. Two crossings that lie so close
 * that g stays below ε between them are the same as a touch.
 *
 * | symbol | name here |
 * | --- | --- |
 * | ε | `noise`: rounding of the curve, relative to the largest values so far |
 * | b_i | Bernstein coefficients, length SIZE |
 *
 * Sources: J. M. Lane and R. F. Riesenfeld, BIT 21 (1981) 112 (zeros by Bernstein subdivision); G. E. Collins and
 * A. G. Akritas, Proc. SYMSAC 1976, 272 (isolation by Descartes' rule).
 */
import { bernstein, clenshaw, DEGREE, derivative, SIZE } from './chebyshev';
import type { Track } from './track';

/** Consecutive stretches of time with one sign; `to` of the last is Infinity when the track has a limit. */
export interface SignSegment {
	from: number;
	to: number;
	sign: -1 | 0 | 1;
}

export interface LinearForm {
	weights: ArrayLike<number>;
	constant: number;
}

const DEEPEST = 52;
const EPSILON = 2.220446049250313e-16;
/** One array per depth of subdivision, shared: a search runs to its end before another begins. */
const POOL = Array.from({ length: DEEPEST + 2 }, () => new Float64Array(SIZE));

/** Sign of Σ w_i c_i + constant along the track, as segments without gaps. */
export function signSegments(track: Track, form: LinearForm): SignSegment[] {
	const segments = new SegmentList();
	const finder = new Finder(segments, true);
	const own = new Float64Array(SIZE);
	let noise = 4 * EPSILON * Math.abs(form.constant);
	for (let p = 0; p < track.pieces; p++) {
		noise = 4 * EPSILON * Math.abs(form.constant);
		own.fill(0);
		own[0] = form.constant;
		for (let i = 0; i < track.n; i++) noise += addSpecies(track, p, i, form.weights[i], own);
		finder.piece(own, track.edges[p], track.edges[p + 1], noise);
	}
	if (track.beyond) {
		let limit = form.constant;
		for (let i = 0; i < track.n; i++) limit += form.weights[i] * track.beyond[i];
		segments.add(track.endS, Infinity, Math.abs(limit) <= 4 * noise ? 0 : limit > 0 ? 1 : -1);
	}
	return segments.settled(true);
}

/** Sign of the time derivative of Σ w_i c_i along the track; 0 where it is lost in rounding, also round flat turns. */
export function slopeSegments(track: Track, weights: ArrayLike<number>): SignSegment[] {
	const segments = new SegmentList();
	const finder = new Finder(segments, false);
	const own = new Float64Array(SIZE);
	const slope = new Float64Array(SIZE);
	for (let p = 0; p < track.pieces; p++) {
		own.fill(0);
		let noise = 0;
		for (let i = 0; i < track.n; i++) noise += addSpecies(track, p, i, weights[i], own);
		derivative(own, slope);
		// |T_k′| ≤ k²: differentiation multiplies the rounding of the interpolant by up to N².
		finder.piece(slope, track.edges[p], track.edges[p + 1], DEGREE * DEGREE * noise);
	}
	if (track.beyond) segments.add(track.endS, Infinity, 0);
	return segments.settled(false);
}

function addSpecies(track: Track, p: number, i: number, weight: number, own: Float64Array): number {
	if (weight === 0) return 0;
	const at = (p * track.n + i) * SIZE;
	for (let k = 0; k < SIZE; k++) own[k] += weight * track.coefficients[at + k];
	return 4 * EPSILON * Math.abs(weight) * track.scales[p * track.n + i];
}

/** Cuts one piece after the other into stretches of one sign. */
class Finder {
	private a: Float64Array = new Float64Array(SIZE);
	private left = 0;
	private width = 0;
	private noise = 0;

	/** @param touches whether a stretch that only comes near zero is to be followed down to where it touches */
	constructor(
		private readonly segments: SegmentList,
		private readonly touches: boolean
	) {}

	piece(a: Float64Array, left: number, right: number, noise: number): void {
		this.a = a;
		this.left = left;
		this.width = right - left;
		this.noise = noise;
		let rest = 0;
		for (let k = 1; k < SIZE; k++) rest += Math.abs(a[k]);
		if (Math.abs(a[0]) > rest + noise) {
			this.segments.add(left, right, a[0] > 0 ? 1 : -1);
			return;
		}
		this.cut(bernstein(a, POOL[0]), 0, 1, 0);
	}

	private cut(b: Float64Array, u0: number, u1: number, depth: number): void {
		const { noise } = this;
		let changes = 0;
		let last = 0;
		let small = 0;
		for (let i = 0; i < SIZE; i++) {
			const sign = b[i] > noise ? 1 : b[i] < -noise ? -1 : 0;
			if (sign === 0) small++;
			else if (sign !== last) {
				if (last !== 0) changes++;
				last = sign;
			}
		}
		if (small === SIZE) return this.add(u0, u1, 0);
		if (changes === 0 && (small === 0 || !this.touches)) return this.add(u0, u1, last as 1 | -1);
		if (changes === 1 && Math.abs(b[0]) > noise && Math.abs(b[DEGREE]) > noise)
			return this.crossing(u0, u1, b[0] > 0);
		if (depth >= DEEPEST) return this.add(u0, u1, 0);
		const right = POOL[depth + 1];
		halve(b, right);
		const middle = (u0 + u1) / 2;
		this.cut(b, u0, middle, depth + 1);
		this.cut(right, middle, u1, depth + 1);
	}

	/** Exactly one zero between: regula falsi with bisection (Illinois), on the Chebyshev form. */
	private crossing(u0: number, u1: number, startsAbove: boolean): void {
		let low = 2 * u0 - 1;
		let high = 2 * u1 - 1;
		let valueLow = clenshaw(this.a, low);
		let valueHigh = clenshaw(this.a, high);
		let side = 0;
		for (let i = 0; i < 80 && high - low > 4e-16; i++) {
			let x = (low * valueHigh - high * valueLow) / (valueHigh - valueLow);
			if (!(x > low && x < high) || i % 8 === 7) x = (low + high) / 2;
			if (x <= low || x >= high) break;
			const value = clenshaw(this.a, x);
			if (value === 0) {
				low = high = x;
				break;
			}
			if (value > 0 === startsAbove) {
				low = x;
				valueLow = value;
				if (side === -1) valueHigh /= 2;
				side = -1;
			} else {
				high = x;
				valueHigh = value;
				if (side === 1) valueLow /= 2;
				side = 1;
			}
			if (Math.abs(value) < 1e-3 * this.noise) {
				low = high = x;
				break;
			}
		}
		const at = this.left + (this.width * (1 + (low + high) / 2)) / 2;
		const before = startsAbove ? 1 : -1;
		this.segments.add(this.left + this.width * u0, at, before);
		this.segments.add(at, this.left + this.width * u1, before === 1 ? -1 : 1);
	}

	private add(u0: number, u1: number, sign: -1 | 0 | 1): void {
		this.segments.add(this.left + this.width * u0, this.left + this.width * u1, sign);
	}
}

/** de Casteljau at the middle: the left half stays in `b`, the right half goes to `right`. */
function halve(b: Float64Array, right: Float64Array): void {
	right.set(b);
	for (let level = 1; level < SIZE; level++) {
		// After each level, b[level] is settled; the tail of `right` holds the right half.
		for (let i = 0; i < SIZE - level; i++) right[i] = (right[i] + right[i + 1]) / 2;
		b[level] = right[0];
	}
}

/** Joins neighbours of equal sign. */
class SegmentList {
	private readonly list: SignSegment[] = [];

	add(from: number, to: number, sign: -1 | 0 | 1): void {
		const last = this.list[this.list.length - 1];
		if (last && last.sign === sign) last.to = to;
		else if (to > from) this.list.push({ from, to, sign });
	}

	/** With `joinCrossings` a zero between opposite signs, a crossing within rounding, becomes one time. */
	settled(joinCrossings: boolean): SignSegment[] {
		const { list } = this;
		const out: SignSegment[] = [];
		list.forEach((segment, i) => {
			const before = out[out.length - 1];
			const after = list[i + 1];
			if (joinCrossings && segment.sign === 0 && before && after && before.sign === -after.sign)
				before.to = segment.from + (segment.to - segment.from) / 2;
			else out.push({ ...segment, from: before ? before.to : segment.from });
		});
		return out;
	}
}
