/**
 * The reference temperature of a fit over several temperatures: inside the studied range, where a constant and its energy are
 * nearly uncorrelated.
 *
 *     centre      T_ref = 1/mean(1/T)
 *     guesses     k' = k · exp(−(E/R)(1/T' − 1/T)), Eyring with the factor T'/T; the same for K with its enthalpy
 *
 * Source: Schwaab & Pinto, Chem. Eng. Sci. 62 (2007) 2750.
 */
import type { FitFinding } from '$lib/schemas/fit';
import { isFitted, type Fittable, type Quantity } from '$lib/schemas/quantity';
import type { RunContent } from '$lib/schemas/run';
import {
	isEquilibrium,
	type RateLawContent,
	type SchemeContent,
	type StepContent
} from '$lib/schemas/scheme';
import { GAS_CONSTANT, inverseTemperatureGap } from '$lib/kinetics/rate-laws';
import { toSi } from '$lib/kinetics/units';

/** `auto`: the scheme's where it lies inside the studied range, else the centre of the runs. */
export type ReferenceChoice = 'auto' | 'scheme' | 'centre';

const ZERO_C = 273.15;
const TOLERANCE_K = 0.01;

/** 1/mean(1/T) of the runs, in °C to a tenth. */
export function centreOf(runs: RunContent[]): number {
	const inverse = runs.map((run) => 1 / toSi(run.temperature, 'temperature'));
	const kelvin = inverse.length / inverse.reduce((sum, x) => sum + x, 0);
	return Number((kelvin - ZERO_C).toFixed(1));
}

const energyOf = (given: Fittable | undefined): number => {
	const stated = isFitted(given) ? given.guess : given;
	return stated ? toSi(stated, 'molar energy') : 0;
};

/** What a constant becomes at another temperature by this energy; the unit stays. */
function moved(constant: Quantity, energy: number, from: number, to: number, eyring = false): Quantity {
	const factor =
		Math.exp((-energy / GAS_CONSTANT) * inverseTemperatureGap(to, from)) * (eyring ? to / from : 1);
	return { ...constant, value: Number((constant.value * factor).toPrecision(12)) };
}

function movedLaw(law: RateLawContent, from: number, to: number): RateLawContent {
	// Without an energy a constant is the same at every temperature.
	if (law.activationEnergy === undefined) return law;
	const kRef = moved(law.kRef, energyOf(law.activationEnergy), from, to, law.form === 'eyring');
	return { ...law, kRef };
}

function movedStep(step: StepContent, from: number, to: number): StepContent {
	const { forward, reverse } = step;
	const back = !reverse
		? null
		: isEquilibrium(reverse)
			? {
					...reverse,
					equilibriumConstant: moved(reverse.equilibriumConstant, energyOf(reverse.enthalpy), from, to)
				}
			: movedLaw(reverse, from, to);
	return { ...step, forward: movedLaw(forward, from, to), reverse: back };
}

export const fitsAnEnergy = ({ steps }: Pick<SchemeContent, 'steps'>): boolean =>
	steps.some(({ forward, reverse }) => {
		if (isFitted(forward.activationEnergy)) return true;
		if (!reverse) return false;
		return isFitted(isEquilibrium(reverse) ? reverse.enthalpy : reverse.activationEnergy);
	});

/** The scheme with its constants at the reference temperature that the choice comes to, and what was done in words. */
export function atReference(
	scheme: SchemeContent,
	runs: RunContent[],
	choice: ReferenceChoice,
	issues: FitFinding[]
): SchemeContent {
	if (choice === 'scheme' || !fitsAnEnergy(scheme)) return scheme;
	const kelvins = runs.map((run) => toSi(run.temperature, 'temperature'));
	const from = toSi(scheme.referenceTemperature, 'temperature');
	const inside = from >= Math.min(...kelvins) - TOLERANCE_K && from <= Math.max(...kelvins) + TOLERANCE_K;
	const centre = centreOf(runs);
	const to = centre + ZERO_C;
	if ((choice === 'auto' && inside) || Math.abs(from - to) < TOLERANCE_K) return scheme;
	const was = Number((from - ZERO_C).toFixed(2));
	issues.push({
		level: 'note',
		code: 'reference-centred',
		message: `Constants are fitted and given at ${centre} °C, the centre of the studied temperatures (1/mean(1/T)), where they are least correlated with their energies, in place of the scheme's ${was} °C${inside ? '' : ', which lies outside'}.`
	});
	return {
		...scheme,
		steps: scheme.steps.map((step) => movedStep(step, from, to)),
		referenceTemperature: { value: centre, unit: 'degC' }
	};
}
