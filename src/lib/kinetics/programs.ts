/**
 * A batch under a temperature program: holds, linear ramps, jumps, and a measured log as short ramps.
 *
 * Problem: dc/dt = K(T(t)) c. While T is constant the solution is closed; K at two temperatures does not commute unless all
 * activation energies are equal, so a ramp has no closed form. Each step of a ramp uses two exponentials of weighted means of K at two
 * temperatures (`magnus-step.ts`), which is of fourth order and keeps mass and positivity. The step length comes from step
 * doubling: the half steps are kept while
 *
 *     |c_two half steps − c_one step|/15 ≤ tolerance · total · h/duration
 *
 * | symbol | name here |
 * | --- | --- |
 * | h | step length, s |
 * | tolerance | `ProgramOptions.tolerance`, 1e-10 where left out |
 *
 * Derivatives: `program-sensitivity.ts`.
 *
 * Sources: S. Blanes and P. C. Moan, Appl. Numer. Math. 56 (2006) 1519; A. Alvermann and H. Fehske, J. Comput. Phys. 230
 * (2011) 5930, eq. for CF4:2; W. Magnus, Commun. Pure Appl. Math. 7 (1954) 649.
 */
import { MagnusStepper } from './magnus-step';
import type { Propagator } from './propagator';
import { temperatureAt, type ProgramSegment } from './program-segments';
import { track, type Track, type Trajectory } from './track';
import type { Network } from './types';

export { holdSegment, jumpFree, programDuration, programFromLog, rampSegment } from './program-segments';
export type { ProgramSegment } from './program-segments';

export interface ProgramOptions {
	/** mol/L of species held in excess. */
	excessMolPerL?: Record<string, number>;
	/** Error of any species over the whole program, as a fraction of the total charge. */
	tolerance?: number;
}

/** A piece of the program's solution: from its start one exponential, or one Magnus step, reaches every time in it. */
interface Node {
	startS: number;
	segment: ProgramSegment;
	/** Time into the segment at the node, s. */
	insideS: number;
	c: Float64Array;
}

/** Concentrations under a program, at any time of it. */
export class ProgramSolution implements Trajectory {
	readonly n: number;
	readonly durationS: number;
	/** Times at which the program jumps or bends, s. */
	readonly breaksS: number[];
	/** Sum of the local error estimates, as a fraction of the total charge. */
	errorEstimate = 0;
	readonly nodes: Node[] = [];
	private readonly holdSystems = new Map<Node, Propagator>();
	private readonly magnus: MagnusStepper;

	constructor(
		readonly network: Network,
		readonly program: readonly ProgramSegment[],
		readonly charge: Float64Array,
		private readonly options: ProgramOptions
	) {
		this.n = network.species.length;
		this.magnus = new MagnusStepper(network, options.excessMolPerL ?? {});
		this.durationS = program.reduce((sum, segment) => sum + segment.durationS, 0);
		this.breaksS = [];
		this.integrate();
	}

	/** mol/L at a time from 0 to the end of the program. */
	at(timeS: number, out: Float64Array = new Float64Array(this.n)): Float64Array {
		if (!(timeS >= 0 && timeS <= this.durationS * (1 + 1e-12)))
			throw new RangeError(`A time from 0 to ${this.durationS} s is expected; found ${timeS} s.`);
		const node = this.nodeBefore(timeS);
		const h = timeS - node.startS;
		if (h <= 0) out.set(node.c);
		else if (node.segment.fromK === node.segment.toK) this.holding(node).apply(h, node.c, out);
		else this.magnus.step(node.segment, node.insideS, h, node.c, out);
		return out;
	}

	/** All species at many times, times-major. */
	curves(timesS: ArrayLike<number>): Float64Array {
		const out = new Float64Array(this.n * timesS.length);
		for (let k = 0; k < timesS.length; k++) this.at(timesS[k], out.subarray(k * this.n, (k + 1) * this.n));
		return out;
	}

	/** K at a time (the later segment's at a jump). */
	temperatureAt(timeS: number): number {
		return temperatureAt(this.program, timeS);
	}

	/** The curve as a track: extrema and spans in which criteria hold, none missed. */
	track(): Track {
		return track(this, { horizonS: this.durationS, breaksS: this.breaksS, error: this.errorEstimate });
	}

	private nodeBefore(timeS: number): Node {
		let low = 0;
		for (let high = this.nodes.length - 1; low < high;) {
			const middle = (low + high + 1) >> 1;
			if (this.nodes[middle].startS <= timeS) low = middle;
			else high = middle - 1;
		}
		return this.nodes[low];
	}

	private holding(node: Node): Propagator {
		let found = this.holdSystems.get(node);
		if (!found) this.holdSystems.set(node, (found = this.magnus.propagator(node.segment.fromK)));
		return found;
	}

	private integrate(): void {
		const total = this.charge.reduce((sum, c) => sum + Math.abs(c), 0) || 1;
		const tolerance = this.options.tolerance ?? 1e-10;
		const c = this.charge.slice();
		let startS = 0;
		for (const segment of this.program) {
			if (segment.durationS <= 0) continue;
			if (startS > 0) this.breaksS.push(startS);
			if (segment.fromK === segment.toK) {
				const node = { startS, segment, insideS: 0, c: c.slice() };
				this.nodes.push(node);
				this.holding(node).apply(segment.durationS, c, c);
			} else this.ramp(segment, startS, c, total, tolerance);
			startS += segment.durationS;
		}
		this.nodes.push({
			startS,
			segment: this.program[this.program.length - 1],
			insideS: this.program[this.program.length - 1].durationS,
			c
		});
	}

	/** Steps through one ramp; every half step becomes a node. */
	private ramp(
		segment: ProgramSegment,
		startS: number,
		c: Float64Array,
		total: number,
		tolerance: number
	): void {
		const { durationS } = segment;
		const whole = new Float64Array(this.n);
		const half = new Float64Array(this.n);
		const end = new Float64Array(this.n);
		let inside = 0;
		let h = Math.min(durationS, this.magnus.longestStep(segment));
		while (inside < durationS) {
			if (inside + h > durationS * (1 - 1e-12)) h = durationS - inside;
			this.magnus.step(segment, inside, h, c, whole);
			this.magnus.step(segment, inside, h / 2, c, half);
			this.magnus.step(segment, inside + h / 2, h / 2, half, end);
			let error = 0;
			for (let i = 0; i < this.n; i++) error = Math.max(error, Math.abs(end[i] - whole[i]) / 15);
			const allowed = Math.max((tolerance * total * h) / this.durationS, 1e-15 * total);
			if (error > allowed && h > 1e-9 * durationS) {
				h *= Math.max(0.2, 0.9 * (allowed / error) ** 0.25);
				continue;
			}
			this.errorEstimate += error / total;
			this.nodes.push({ startS: startS + inside, segment, insideS: inside, c: c.slice() });
			this.nodes.push({ startS: startS + inside + h / 2, segment, insideS: inside + h / 2, c: half.slice() });
			c.set(end);
			inside += h;
			if (inside > durationS * (1 - 1e-12)) break;
			const grow = error > 0 ? Math.min(3, 0.9 * (allowed / error) ** 0.25) : 3;
			h = Math.min(h * Math.max(1, grow), this.magnus.longestStep(segment), durationS - inside);
		}
	}
}

/**
 * Follows a batch through a temperature program.
 * @param charge mol/L in species order
 * @throws RangeError when the program is empty, a temperature is not above 0 K, or an excess concentration is missing
 */
export function runProgram(
	network: Network,
	program: readonly ProgramSegment[],
	charge: ArrayLike<number>,
	options: ProgramOptions = {}
): ProgramSolution {
	if (program.length === 0 || !program.some((segment) => segment.durationS > 0))
		throw new RangeError('The program is empty. Give at least one hold or ramp with a duration above zero.');
	for (const { durationS, fromK, toK } of program)
		if (!(durationS >= 0 && Number.isFinite(durationS) && fromK > 0 && toK > 0))
			throw new RangeError(
				`A segment needs a duration of zero or more and temperatures above 0 K; found ${durationS} s, ${fromK} K to ${toK} K.`
			);
	if (charge.length !== network.species.length)
		throw new RangeError(`The charge has ${charge.length} values for ${network.species.length} species.`);
	return new ProgramSolution(network, program, Float64Array.from(charge), options);
}
