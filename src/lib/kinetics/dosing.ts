/**
 * Semi-batch operation: several continuous feeds and shots, in amounts.
 *
 * Problem: while a feed runs the volume grows, so concentrations obey no linear law with constant coefficients; amounts do,
 * as long as every step is first order in its reactant: dn/dt = K n + f. Between events f is constant and the solution is
 * closed (`augmented.ts`); concentrations follow from the volume, c = n/V.
 *
 * A species held in excess is diluted by what is dosed, so its pseudo-first-order constant falls: K is taken as constant here,
 * and whoever shows the curve says so.
 *
 * | symbol | name here |
 * | --- | --- |
 * | n | `amountsAt`, mol |
 * | f | `Feed.molPerS` |
 * | V | `volumeAt`, L |
 *
 * Derivatives by every entry of the plan: `dosing-sensitivity.ts`. Source: O. Levenspiel, Chemical Reaction Engineering, 3rd ed.
 * (1999), ch. 4 and 5 (balances of semi-batch vessels); C. F. Van Loan, IEEE Trans. Automat. Control 23 (1978) 395.
 */
import { withFeed } from './augmented';
import { Propagator } from './propagator';
import { track, type Track, type Trajectory } from './track';
import type { LinearSystem } from './types';

export interface Feed {
	startS: number;
	endS: number;
	/** mol/s of each species, in species order. */
	molPerS: ArrayLike<number>;
	litresPerS: number;
}

/** All at once. */
export interface Shot {
	timeS: number;
	/** mol of each species. */
	mol: ArrayLike<number>;
	litres: number;
}

export interface DosingPlan {
	/** In the vessel at t = 0: mol of each species, and litres. */
	startMol: ArrayLike<number>;
	startLitres: number;
	feeds: readonly Feed[];
	shots: readonly Shot[];
}

/** Between two events: constant feeds, one closed solution. */
export interface DosingPiece {
	startS: number;
	/** The system with its source, for the feeds that run in this piece. */
	system: LinearSystem;
	propagator: Propagator;
	/** Amounts with the source (1) in the last place. */
	start: Float64Array;
	litres: number;
	litresPerS: number;
}

/** Amounts, volume and concentrations at any time of a dosed batch. */
export class DosingSolution implements Trajectory {
	readonly n: number;
	/** Times of shots, and of feeds that begin or end, s. */
	readonly breaksS: number[];
	readonly pieces: DosingPiece[] = [];
	private readonly scratch: Float64Array;

	constructor(
		readonly system: LinearSystem,
		readonly plan: DosingPlan
	) {
		this.n = system.n;
		this.scratch = new Float64Array(this.n + 1);
		checkPlan(plan, this.n);
		this.breaksS = [
			...new Set([...plan.feeds.flatMap((f) => [f.startS, f.endS]), ...plan.shots.map((s) => s.timeS)])
		]
			.filter((t) => t > 0)
			.sort((a, b) => a - b);
		const mol = new Float64Array(this.n + 1);
		for (let i = 0; i < this.n; i++) mol[i] = plan.startMol[i];
		mol[this.n] = 1;
		let litres = plan.startLitres;
		[0, ...this.breaksS].forEach((startS, k) => {
			if (k > 0) {
				const last = this.pieces[k - 1];
				const h = startS - last.startS;
				last.propagator.apply(h, last.start, mol);
				litres = last.litres + last.litresPerS * h;
			}
			for (const shot of plan.shots)
				if (shot.timeS === startS) {
					for (let i = 0; i < this.n; i++) mol[i] += shot.mol[i];
					litres += shot.litres;
				}
			const running = plan.feeds.filter((f) => f.startS <= startS && startS < f.endS);
			const feed = Float64Array.from({ length: this.n }, (_, i) =>
				running.reduce((sum, f) => sum + f.molPerS[i], 0)
			);
			const fed = withFeed(system, feed);
			this.pieces.push({
				startS,
				system: fed,
				propagator: new Propagator(fed),
				start: mol.slice(),
				litres,
				litresPerS: running.reduce((sum, f) => sum + f.litresPerS, 0)
			});
		});
	}

	/** mol of each species. A shot counts from its time on. */
	amountsAt(timeS: number, out: Float64Array = new Float64Array(this.n)): Float64Array {
		const piece = this.pieceAt(timeS);
		piece.propagator.apply(timeS - piece.startS, piece.start, this.scratch);
		out.set(this.scratch.subarray(0, this.n));
		return out;
	}

	/** L. */
	volumeAt(timeS: number): number {
		const piece = this.pieceAt(timeS);
		return piece.litres + piece.litresPerS * (timeS - piece.startS);
	}

	/** mol/L of each species. */
	at(timeS: number, out: Float64Array = new Float64Array(this.n)): Float64Array {
		this.amountsAt(timeS, out);
		const litres = this.volumeAt(timeS);
		for (let i = 0; i < this.n; i++) out[i] /= litres;
		return out;
	}

	/** mol of each species charged, dosed or shot in until then. */
	addedBy(timeS: number): Float64Array {
		return Float64Array.from({ length: this.n }, (_, i) => {
			let sum = this.plan.startMol[i];
			for (const { startS, endS, molPerS } of this.plan.feeds)
				sum += molPerS[i] * Math.max(0, Math.min(endS, timeS) - startS);
			for (const shot of this.plan.shots) if (shot.timeS <= timeS) sum += shot.mol[i];
			return sum;
		});
	}

	/** Share of what was added of a species that is still there: its thermal accumulation where it is the dosed reagent. */
	accumulation(species: number, timeS: number): number {
		const added = this.addedBy(timeS)[species];
		return added > 0 ? this.amountsAt(timeS)[species] / added : 0;
	}

	/** The concentrations as a track, for extrema and criteria. Jumps at shots are breaks. */
	track(horizonS: number): Track {
		return track(this, { horizonS, breaksS: this.breaksS });
	}

	private pieceAt(timeS: number): DosingPiece {
		if (!(timeS >= 0)) throw new RangeError(`A time ≥ 0 s is expected; found ${timeS} s.`);
		let found = this.pieces[0];
		for (const piece of this.pieces) if (piece.startS <= timeS) found = piece;
		return found;
	}
}

/** @throws RangeError naming the entry of the plan that cannot be used */
export function runDosing(system: LinearSystem, plan: DosingPlan): DosingSolution {
	return new DosingSolution(system, plan);
}

function checkPlan({ startMol, startLitres, feeds, shots }: DosingPlan, n: number): void {
	const whole = (values: ArrayLike<number>) =>
		values.length === n && Array.from(values).every((v) => v >= 0 && Number.isFinite(v));
	if (!whole(startMol)) throw new RangeError(`The charge needs ${n} amounts of zero or more, in mol.`);
	const volumes = startLitres + shots.reduce((sum, s) => sum + (s.timeS === 0 ? s.litres : 0), 0);
	if (!(volumes > 0)) throw new RangeError(`A starting volume above 0 L is expected; found ${volumes} L.`);
	feeds.forEach((feed, i) => {
		if (!whole(feed.molPerS) || !(feed.litresPerS >= 0) || !(feed.startS >= 0 && feed.endS > feed.startS))
			throw new RangeError(
				`Feed ${i + 1}: rates of zero or more and an end after its start (from 0 s on) are expected.`
			);
	});
	shots.forEach((shot, i) => {
		if (!whole(shot.mol) || !(shot.litres >= 0) || !(shot.timeS >= 0))
			throw new RangeError(`Shot ${i + 1}: amounts, volume and time of zero or more are expected.`);
	});
}
