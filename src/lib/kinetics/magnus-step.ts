/**
 * One step along a temperature ramp: the fourth-order commutator-free Magnus formula.
 *
 *     c(t + h) = e^{h(α₂K₁ + α₁K₂)} e^{h(α₁K₁ + α₂K₂)} c(t),   K₁,₂ = K(T(t + (½ ∓ √3/6) h)),   α₁,₂ = ¼ ± √3/6
 *
 * Each exponent is itself a first-order scheme while no constant grows more than sevenfold within the step, so mass and
 * positivity are kept; `longestStep` allows threefold.
 *
 * | symbol | name here |
 * | --- | --- |
 * | α₁, α₂ | `ALPHA_1`, `ALPHA_2` |
 * | √3/6 | `GAUSS` |
 * | K₁, K₂ and their shares of an exponent | `Stage.parts` |
 *
 * Sources: S. Blanes and P. C. Moan, Appl. Numer. Math. 56 (2006) 1519; A. Alvermann and H. Fehske, J. Comput. Phys. 230
 * (2011) 5930, eq. for CF4:2.
 */
import { linearSystem } from './linear-system';
import type { ProgramSegment } from './program-segments';
import { Propagator } from './propagator';
import { rateConstants } from './rate-laws';
import type { Conditions, LinearSystem, Network, RateConstants } from './types';

const ALPHA_1 = 0.25 + Math.sqrt(3) / 6;
const ALPHA_2 = 0.25 - Math.sqrt(3) / 6;
const GAUSS = Math.sqrt(3) / 6;

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
