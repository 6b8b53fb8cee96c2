/**
 * First-order sensitivities of a batch under a temperature program to every parameter, analytic.
 *
 *     s = ∂c/∂θ,   s(t + h) = e^{hK̃} s(t) + Σ_d (∂e^{hK̃}c/∂ ln k̃_d) ∂ ln k̃_d/∂θ
 *
 * for each exponential of a Magnus step (`programs.ts`), with k̃ = α₁k₁ + α₂k₂ and ∂ ln k̃/∂θ the mean of the effects at the two
 * temperatures (`rate-parameters.ts`), weighted with their shares of k̃. A derivative may be small beside the charge (early
 * times, slow steps), so the steps that serve the curve are not enough: c and all s are carried together, each ramp step once
 * and in halves, extrapolated:
 *
 *     y ← y_fine + (y_fine − y_coarse)/15        (the step is symmetric in time: its error has even powers of h only, so that
 *                                                 the result is of sixth order)
 *
 * and halved again until the correction is below 1e-6 of every component's largest value so far. Holds are exact.
 *
 * | symbol | name here |
 * | --- | --- |
 * | c, s | `State.c`, `State.s` |
 * | ∂ ln k̃_d/∂θ | `stageEffects` |
 *
 * Sources: derivative of the exponential by an augmented system, C. F. Van Loan, IEEE Trans. Automat. Control 23 (1978) 395;
 * extrapolation of symmetric one-step methods, E. Hairer, S. P. Nørsett and G. Wanner, Solving Ordinary Differential
 * Equations I, 2nd ed. (1993), II.8 and II.9.
 */
import { MagnusStepper, type Stage } from './magnus-step';
import { innerParameters } from './parameter-sensitivity';
import type { ProgramSegment } from './program-segments';
import type { ProgramSolution } from './programs';
import { Propagator } from './propagator';
import { chainWeights, type FirstOrderParameter, type RateParameter } from './rate-parameters';
import { sensitivities } from './sensitivity';
import type { Network } from './types';

/** Correction by extrapolation that is let pass, beside the component's largest value: the error left is its 4/3 power. */
const CORRECTION = 1e-6;
const MOST_HALVINGS = 12;

/**
 * ∂c/∂θ at times of the program (ascending), mol/L per unit of the parameter: out[(p·times + k)·n + i].
 * @throws RangeError when a time lies outside the program.
 */
export function programSensitivities(
	solution: ProgramSolution,
	timesS: ArrayLike<number>,
	parameters: readonly FirstOrderParameter[],
	excessMolPerL: Record<string, number> = {}
): Float64Array {
	const { n, nodes, durationS } = solution;
	const walk = new SensitivityWalk(solution, parameters, excessMolPerL);
	const out = new Float64Array(parameters.length * timesS.length * n);
	let state = walk.start();
	let k = 0;
	for (let m = 0; m < nodes.length && k < timesS.length; m++) {
		const node = nodes[m];
		const endS = nodes[m + 1]?.startS ?? durationS * (1 + 1e-12);
		const advance = (h: number) => (h > 0 ? walk.advance(state, node.segment, node.insideS, h) : state);
		for (; k < timesS.length && (timesS[k] < endS || m === nodes.length - 1); k++) {
			if (!(timesS[k] >= 0 && timesS[k] <= durationS * (1 + 1e-12)))
				throw new RangeError(`A time from 0 to ${durationS} s is expected; found ${timesS[k]} s.`);
			const there = advance(timesS[k] - node.startS);
			there.s.forEach((s, p) => out.set(s, (p * timesS.length + k) * n));
		}
		if (m < nodes.length - 1) {
			state = advance(endS - node.startS);
			walk.note(state);
		}
	}
	return out;
}

interface State {
	c: Float64Array;
	/** ∂c/∂θ, one array a parameter. */
	s: Float64Array[];
}

class SensitivityWalk {
	private readonly stepper: MagnusStepper;
	private readonly network: Network;
	/** Largest value so far: of each species in c, then of each parameter's derivatives. */
	private readonly largest: Float64Array;

	constructor(
		private readonly solution: ProgramSolution,
		private readonly parameters: readonly FirstOrderParameter[],
		private readonly excessMolPerL: Record<string, number>
	) {
		this.network = solution.network;
		this.stepper = new MagnusStepper(solution.network, excessMolPerL);
		this.largest = new Float64Array(solution.n + parameters.length);
	}

	start(): State {
		const s = this.parameters.map((parameter) => {
			const own = new Float64Array(this.solution.n);
			if (parameter.kind === 'charge') own[parameter.species] = 1;
			return own;
		});
		return { c: this.solution.charge.slice(), s };
	}

	/** Takes notice of the sizes reached. */
	note({ c, s }: State): void {
		const { largest } = this;
		c.forEach((value, i) => (largest[i] = Math.max(largest[i], Math.abs(value))));
		s.forEach((own, p) => {
			const at = c.length + p;
			largest[at] = own.reduce((top, value) => Math.max(top, Math.abs(value)), largest[at]);
		});
	}

	/** From a state at `insideS` of a segment on by h. */
	advance(from: State, segment: ProgramSegment, insideS: number, h: number, depth = 0): State {
		if (segment.fromK === segment.toK) return this.through(from, [this.holdStage(segment.fromK)], h);
		const coarse = this.magnus(from, segment, insideS, h);
		const middle = this.magnus(from, segment, insideS, h / 2);
		const fine = this.magnus(middle, segment, insideS + h / 2, h / 2);
		if (depth < MOST_HALVINGS && this.correction(fine, coarse) > CORRECTION) {
			const half = this.advance(from, segment, insideS, h / 2, depth + 1);
			return this.advance(half, segment, insideS + h / 2, h / 2, depth + 1);
		}
		const extrapolated = (a: Float64Array, b: Float64Array) =>
			a.map((value, i) => value + (value - b[i]) / 15);
		return { c: extrapolated(fine.c, coarse.c), s: fine.s.map((own, p) => extrapolated(own, coarse.s[p])) };
	}

	/** Largest correction beside the size that its component has reached. */
	private correction(fine: State, coarse: State): number {
		const { largest } = this;
		const { n } = this.solution;
		let worst = 0;
		fine.c.forEach((value, i) => {
			const size = Math.max(largest[i], Math.abs(value));
			if (size > 0) worst = Math.max(worst, Math.abs(value - coarse.c[i]) / (15 * size));
		});
		fine.s.forEach((own, p) => {
			let [size, change] = [largest[n + p], 0];
			own.forEach((value, i) => {
				size = Math.max(size, Math.abs(value));
				change = Math.max(change, Math.abs(value - coarse.s[p][i]));
			});
			if (size > 0) worst = Math.max(worst, change / (15 * size));
		});
		return worst;
	}

	private magnus(from: State, segment: ProgramSegment, insideS: number, h: number): State {
		return this.through(from, this.stepper.stages(segment, insideS, h), h);
	}

	private holdStage(temperatureK: number): Stage {
		const constants = this.stepper.constants(temperatureK);
		return { system: this.stepper.systemAt(temperatureK), parts: [{ weight: 1, temperatureK, constants }] };
	}

	/** Through the exponentials of one step, earlier one first. */
	private through(from: State, stages: readonly Stage[], h: number): State {
		let state = from;
		for (const stage of stages) {
			const { system } = stage;
			const { n } = system;
			const { derivatives } = sensitivities(system, state.c, [h], innerParameters(system, 0));
			const propagator = new Propagator(system);
			const s = this.parameters.map((parameter, p) => {
				const moved = propagator.apply(h, state.s[p]);
				if (parameter.kind === 'charge') return moved;
				this.stageEffects(stage, parameter).forEach((effect, d) => {
					if (effect !== 0) for (let i = 0; i < n; i++) moved[i] += effect * derivatives[d * n + i];
				});
				return moved;
			});
			state = { c: propagator.apply(h, state.c), s };
		}
		return state;
	}

	/** ∂ ln k̃_d/∂θ of each flow of a stage: the effects at its temperatures, each with its share of k̃_d. */
	private stageEffects(stage: Stage, parameter: RateParameter): Float64Array {
		const { network, excessMolPerL } = this;
		const flows = stage.system.flows ?? [];
		const effects = new Float64Array(flows.length);
		for (const { weight, temperatureK, constants } of stage.parts)
			chainWeights(network, stage.system, { temperatureK, excessMolPerL }, parameter).forEach(
				(perUnit, d) => {
					const { step, direction, rate } = flows[d];
					effects[d] += (weight * constants[direction][step] * perUnit) / rate;
				}
			);
		return effects;
	}
}
