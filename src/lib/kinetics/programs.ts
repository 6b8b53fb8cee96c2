/**
 * A batch under a temperature program: holds, linear ramps, jumps, and a measured log as short ramps.
 *
 * Problem: dc/dt = K(T(t)) c. While T is constant the solution is closed; K at two temperatures does not commute unless all
 * activation energies are equal, so a ramp has no closed form. Each step of a ramp uses two exponentials of weighted means:
 *
 *     c(t + h) = e^{h(α₂K₁ + α₁K₂)} e^{h(α₁K₁ + α₂K₂)} c(t),   K₁,₂ = K(T(t + (½ ∓ √3/6) h)),   α₁,₂ = ¼ ± √3/6
 *
 * which is of fourth order and keeps mass and positivity (each exponent is itself a first-order scheme while no constant grows
 * more than sevenfold within the step). The step length comes from step doubling: the difference of one step and two half
 * steps, divided by 15, stays below the tolerance per unit of time; the half steps are kept.
 *
 * | symbol | name here |
 * | --- | --- |
 * | α₁, α₂ | `ALPHA_1`, `ALPHA_2` |
 * | K₁, K₂ | rate constants at the two Gauss points, `Stage` |
 *
 * Sources: S. Blanes and P. C. Moan, Appl. Numer. Math. 56 (2006) 1519; A. Alvermann and H. Fehske, J. Comput. Phys. 230
 * (2011) 5930, eq. for CF4:2; W. Magnus, Commun. Pure Appl. Math. 7 (1954) 649.
 */
import { linearSystem } from './linear-system';
import { Propagator } from './propagator';
import { rateConstants } from './rate-laws';
import { temperatureAt, type ProgramSegment } from './program-segments';
import { track, type Track, type Trajectory } from './track';
import type { Conditions, LinearSystem, Network, RateConstants } from './types';

export { holdSegment, jumpFree, programDuration, programFromLog, rampSegment } from './program-segments';
export type { ProgramSegment } from './program-segments';

const ALPHA_1 = 0.25 + Math.sqrt(3) / 6;
const ALPHA_2 = 0.25 - Math.sqrt(3) / 6;
const GAUSS = Math.sqrt(3) / 6;

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

/** One fourth-order step along a ramp, and what its two exponentials are made of. */
export class MagnusStepper {
	private readonly conditions: Conditions;
	private readonly middle: Float64Array;

	constructor(
		private readonly network: Network,
		excessMolPerL: Record<string, number>
	) {
		this.conditions = { temperatureK: network.referenceTemperatureK, excessMolPerL };
		this.middle = new Float64Array(network.species.length);
	}

	constants(temperatureK: number): RateConstants {
		return rateConstants(this.network, { ...this.conditions, temperatureK });
	}

	propagator(temperatureK: number): Propagator {
		return new Propagator(this.systemAt(temperatureK));
	}

	systemAt(temperatureK: number): LinearSystem {
		return linearSystem(this.network, this.constants(temperatureK));
	}

	step(segment: ProgramSegment, insideS: number, h: number, c: Float64Array, out: Float64Array): void {
		const [first, second] = this.stages(segment, insideS, h);
		new Propagator(first.system).apply(h, c, this.middle);
		new Propagator(second.system).apply(h, this.middle, out);
	}

	/** The two exponents of a step, each as a scheme of its own (to be run for the time h), earlier one first. */
	stages(segment: ProgramSegment, insideS: number, h: number): [Stage, Stage] {
		const temperature = (x: number) =>
			segment.fromK + ((segment.toK - segment.fromK) * (insideS + x * h)) / segment.durationS;
		const early = temperature(0.5 - GAUSS);
		const late = temperature(0.5 + GAUSS);
		const k1 = this.constants(early);
		const k2 = this.constants(late);
		const stage = (a: number, b: number): Stage => ({
			system: linearSystem(this.network, mix(a, k1, b, k2)),
			parts: [
				{ weight: a, temperatureK: early, constants: k1 },
				{ weight: b, temperatureK: late, constants: k2 }
			]
		});
		return [stage(ALPHA_1, ALPHA_2), stage(ALPHA_2, ALPHA_1)];
	}

	/** Longest step in which no constant changes more than threefold: both exponents stay schemes with constants ≥ 0. */
	longestStep(segment: ProgramSegment): number {
		const from = this.constants(segment.fromK);
		const to = this.constants(segment.toK);
		let most = 0;
		for (const direction of ['forward', 'reverse'] as const)
			from[direction].forEach((k, i) => {
				if (k > 0 && to[direction][i] > 0) most = Math.max(most, Math.abs(Math.log(to[direction][i] / k)));
			});
		const hottest = Math.max(segment.fromK, segment.toK) / Math.min(segment.fromK, segment.toK);
		return most > 0 ? (segment.durationS * Math.log(3)) / (most * hottest) : segment.durationS;
	}
}

export interface Stage {
	system: LinearSystem;
	parts: { weight: number; temperatureK: number; constants: RateConstants }[];
}

function mix(a: number, k1: RateConstants, b: number, k2: RateConstants): RateConstants {
	return {
		forward: k1.forward.map((k, i) => a * k + b * k2.forward[i]),
		reverse: k1.reverse.map((k, i) => a * k + b * k2.reverse[i])
	};
}
