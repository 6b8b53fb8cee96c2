/**
 * First-order sensitivities of a batch under a temperature program to every parameter, analytic, on the steps of its solution.
 *
 *     s = ∂c/∂θ,   s(t + h) = e^{hK̃} s(t) + Σ_d (∂e^{hK̃}c/∂ ln k̃_d) ∂ ln k̃_d/∂θ
 *
 * for each exponential of the program (`programs.ts`), with k̃ = α₁k₁ + α₂k₂ and ∂ ln k̃/∂θ the mean of the effects at the two
 * temperatures (`rate-parameters.ts`), weighted with their shares of k̃.
 *
 * Source: derivative of the exponential by an augmented system, C. F. Van Loan, IEEE Trans. Automat. Control 23 (1978) 395.
 */
import { MagnusStepper, type ProgramSolution, type Stage } from './programs';
import { Propagator } from './propagator';
import { rateEffects, type FirstOrderParameter } from './rate-parameters';
import { sensitivities, type SensitivityParameter } from './sensitivity';

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
	const { n, network, nodes } = solution;
	const stepper = new MagnusStepper(network, excessMolPerL);
	const out = new Float64Array(parameters.length * timesS.length * n);
	const state = parameters.map((parameter): Float64Array => {
		const s = new Float64Array(n);
		if (parameter.kind === 'charge') s[parameter.species] = 1;
		return s;
	});
	let k = 0;
	for (let m = 0; m < nodes.length && k < timesS.length; m++) {
		const node = nodes[m];
		const endS = nodes[m + 1]?.startS ?? solution.durationS * (1 + 1e-12);
		const advance = (h: number): Float64Array[] => {
			if (!(h > 0)) return state.map((s) => s.slice());
			const hold = node.segment.fromK === node.segment.toK;
			const stages = hold
				? [holdStage(stepper, node.segment.fromK)]
				: stepper.stages(node.segment, node.insideS, h);
			let c = node.c;
			let moved = state;
			for (const stage of stages) {
				moved = throughStage(stage, h, c, moved, parameters, solution);
				c = new Propagator(stage.system).apply(h, c);
			}
			return moved;
		};
		for (; k < timesS.length && (timesS[k] < endS || m === nodes.length - 1); k++) {
			if (!(timesS[k] >= 0 && timesS[k] <= solution.durationS * (1 + 1e-12)))
				throw new RangeError(`A time from 0 to ${solution.durationS} s is expected; found ${timesS[k]} s.`);
			advance(timesS[k] - node.startS).forEach((s, p) => out.set(s, (p * timesS.length + k) * n));
		}
		if (m < nodes.length - 1) advance(endS - node.startS).forEach((s, p) => state[p].set(s));
	}
	return out;
}

function holdStage(stepper: MagnusStepper, temperatureK: number): Stage {
	const constants = stepper.constants(temperatureK);
	return { system: stepper.systemAt(temperatureK), parts: [{ weight: 1, temperatureK, constants }] };
}

function throughStage(
	stage: Stage,
	h: number,
	c: Float64Array,
	state: Float64Array[],
	parameters: readonly FirstOrderParameter[],
	{ network, n }: ProgramSolution
): Float64Array[] {
	const directions = (stage.system.flows ?? []).map(({ step, direction }): SensitivityParameter => ({
		kind: 'rate',
		step,
		direction
	}));
	const { derivatives } = sensitivities(stage.system, c, [h], directions);
	const propagator = new Propagator(stage.system);
	return parameters.map((parameter, p) => {
		const moved = propagator.apply(h, state[p]);
		if (parameter.kind === 'charge') return moved;
		(stage.system.flows ?? []).forEach(({ step, direction, rate }, d) => {
			let effect = 0;
			for (const { weight, temperatureK, constants } of stage.parts)
				for (const found of rateEffects(network, temperatureK, parameter))
					if (found.step === step && found.direction === direction)
						effect += (weight * constants[direction][step] * found.perUnit) / rate;
			if (effect !== 0) for (let i = 0; i < n; i++) moved[i] += effect * derivatives[d * n + i];
		});
		return moved;
	});
}
