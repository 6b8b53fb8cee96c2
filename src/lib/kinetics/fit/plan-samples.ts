/**
 * When to sample the first run: a plan from a scheme with guessed constants and the error that an assay value is expected to
 * have, before anything was measured.
 *
 *     maximise ln det Σ_k g(t_k) g(t_k)ᵀ/σ²,   g = ∂y/∂θ at the guesses,   σ² = a² + (b y)²
 *
 * The plan is D-optimal at the guesses alone (locally optimal): constants that turn out otherwise ask for other times. The search is
 * that of `sampling-plan.ts` without prior information.
 *
 * Sources: Box & Lucas, Biometrika 46 (1959) 77; Chernoff, Ann. Math. Stat. 24 (1953) 586 (locally optimal designs).
 */
import { fitOptions, type FitFinding, type FitRequest } from '../../schemas/fit';
import type { SamplePlanRequest } from '../../schemas/fit-plan';
import { isFitted, type Fittable } from '../../schemas/quantity';
import { isEquilibrium, type StepContent } from '../../schemas/scheme';
import { toSi } from '../units';
import type { FitHooks } from './fit';
import { readSlots } from './read-slots';
import { samplingPlan, type SamplingPlan } from './sampling-plan';

/**
 * Plans the samples of a run from guesses, without a fit.
 *
 * @param asked scheme (its constants are the guesses, in their own units), conditions and channels of the run, expected error of
 *   one value (a in the channel's unit, b as a fraction), number of samples and the times at which they can be taken (in the
 *   run's time unit)
 * @returns times, ln det of the information, and the half-width of each interval that the samples can be expected to give
 *   (`before` is null: there is no fit yet). Energies are taken as known where the run has one temperature.
 * @throws RangeError in words for a guess that is missing, a parameter that is not of this scheme, or limits that leave no room;
 *   FitCancelled
 */
export function planSamplesFor(asked: SamplePlanRequest, hooks: FitHooks = {}): SamplingPlan {
	const request = requestOf(asked);
	const held = needGuesses(request);
	const { samples, earliest, latest, minimumGap, windows, channels, confidenceLevel } = asked;
	const options = {
		samples,
		earliest,
		latest,
		minimumGap,
		confidence: confidenceLevel,
		...(windows.length ? { windows } : {}),
		...(channels.length ? { channels: knownChannels(asked) } : {})
	};
	const plan = samplingPlan(request, null, request.runs[0], options, hooks);
	return { ...plan, findings: [...plan.findings, ...remarks(asked, plan, held)] };
}

function requestOf(asked: SamplePlanRequest): FitRequest {
	const { species, referenceTemperature, run, error } = asked;
	const fitsEnergies = (run.temperatureLog?.length ?? 0) >= 2;
	const offReference = toSi(run.temperature, 'temperature') !== toSi(referenceTemperature, 'temperature');
	return {
		species,
		steps: fitsEnergies ? asked.steps : asked.steps.map((step) => withKnownEnergies(step, offReference)),
		referenceTemperature,
		runs: [{ ...run, id: run.id ?? 'r1', timepoints: [] }],
		options: fitOptions.parse({ fixed: asked.fixed, weighting: { model: 'combined', ...error } })
	};
}

/** One temperature says nothing of an energy: its guess is taken as known; at the reference temperature it does not matter. */
function withKnownEnergies(step: StepContent, needed: boolean): StepContent {
	const known = (given: Fittable | undefined, what: string): Fittable | undefined => {
		if (!given || !isFitted(given)) return given;
		if (given.guess) return given.guess;
		if (!needed) return { value: 0, unit: 'kJ/mol' };
		throw new RangeError(
			`The ${what} of step ${step.id} has no guess, and the run is not at the reference temperature. Give one, or state the constant at the run's temperature.`
		);
	};
	const { forward, reverse } = step;
	const energy = (law: StepContent['forward']) => ({
		...law,
		activationEnergy: known(law.activationEnergy, 'activation energy')
	});
	return {
		...step,
		forward: energy(forward),
		reverse:
			reverse && isEquilibrium(reverse)
				? { ...reverse, enthalpy: known(reverse.enthalpy, 'enthalpy') }
				: reverse && energy(reverse)
	};
}

/** @returns ids that are taken as known although the request did not say so */
function needGuesses(request: FitRequest): string[] {
	const { slots, issues } = readSlots(request);
	const stop = issues.find((issue) => issue.level === 'stop');
	if (stop) throw new RangeError(stop.message);
	const missing = [...slots.values()].filter((slot) => slot.state === 'fitted' && !slot.guessed);
	if (missing.length)
		throw new RangeError(
			`A plan before the first run needs a guess of every parameter; missing: ${missing.map((s) => s.id).join(', ')}. Give a guess, or take the parameter as known.`
		);
	return [...slots.values()].filter((s) => s.kind === 'energy' || s.kind === 'enthalpy').map((s) => s.id);
}

function knownChannels({ channels, run }: SamplePlanRequest): string[] {
	const unknown = channels.find((id) => !run.channels.some((c) => c.id === id));
	if (unknown !== undefined)
		throw new RangeError(
			`"${unknown}" is not a channel of the run. Its channels are ${run.channels.map((c) => c.id).join(', ')}.`
		);
	return channels;
}

function remarks(asked: SamplePlanRequest, plan: SamplingPlan, energies: string[]): FitFinding[] {
	const found: FitFinding[] = [
		{
			code: 'plan-at-guesses',
			level: 'note',
			message:
				'The times are best for the guessed constants. Where a guess may be wrong by more than a factor of two, spread some samples, or plan again after the first results.'
		}
	];
	if (energies.length > 0 && !asked.run.temperatureLog)
		found.push({
			code: 'plan-energies-known',
			level: 'note',
			message: `${energies.join(', ')} ${energies.length === 1 ? 'is' : 'are'} taken as known: one run at one temperature says nothing of an energy.`,
			parameters: energies
		});
	if (Number.isFinite(plan.logDeterminant) && plan.expected.every((e) => e.after === null))
		found.push({
			code: 'plan-no-degrees-of-freedom',
			level: 'caution',
			message:
				'As many values as parameters: the constants could be computed, but no interval could be given. Plan at least one sample more.'
		});
	return found;
}
