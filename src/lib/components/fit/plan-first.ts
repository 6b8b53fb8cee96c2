/** A plan of samples before the first run: from the scheme as drawn, conditions and an expected error to the engine's question. */
import type { SamplePlanRequest } from '$lib/schemas/fit-plan';
import type { Quantity } from '$lib/schemas/quantity';
import type { RunContent } from '$lib/schemas/run';
import { isEquilibrium, type SchemeContent, type StepContent } from '$lib/schemas/scheme';
import { toSi } from '$lib/kinetics/units';
import type { ReadLimits } from './sample-limits.svelte';

/** A constant of the scheme whose guess the plan stands on. */
export interface Guess {
	id: string;
	guess: Quantity;
}

export function guessesOf(scheme: SchemeContent): Guess[] {
	return scheme.steps
		.filter((step) => step.reactant !== '')
		.flatMap(({ id, forward, reverse }): Guess[] => [
			{ id: `${id}.forward.kRef`, guess: forward.kRef },
			...(!reverse
				? []
				: isEquilibrium(reverse)
					? [{ id: `${id}.reverse.equilibriumConstant`, guess: reverse.equilibriumConstant }]
					: [{ id: `${id}.reverse.kRef`, guess: reverse.kRef }])
		]);
}

/** Species that stand in a rate law as held in excess, without being drawn into a step. */
export function excessOf(scheme: SchemeContent): string[] {
	const laws = scheme.steps.flatMap(({ forward, reverse }) =>
		reverse && !isEquilibrium(reverse) ? [forward, reverse] : [forward]
	);
	return [...new Set(laws.flatMap((law) => (law.excess ?? []).map((e) => e.species)))];
}

/** Species that are charged as a rule: those that a step uses up and none forms. */
export function likelyCharged({ species, steps }: SchemeContent): string[] {
	const formed = new Set(steps.flatMap((s) => s.products.map((p) => p.species)));
	const used = new Set(steps.map((s) => s.reactant));
	return species.map((s) => s.id).filter((id) => used.has(id) && !formed.has(id));
}

const SECONDS: Record<RunContent['timeUnit'], number> = { s: 1, min: 60, h: 3600, d: 86400 };
/** Four half-lives of the slowest step are as a rule what a lab waits for. */
const HALF_LIVES = 4;

/** A latest time to begin with, in this unit: from the slowest guessed constant that is a plain rate. */
export function usualLatest(guesses: Guess[], timeUnit: RunContent['timeUnit']): number {
	const rates = guesses.flatMap(({ id, guess }) => {
		if (!id.endsWith('.kRef')) return [];
		try {
			return [toSi(guess, 'rate constant')];
		} catch {
			return [];
		}
	});
	const slowest = Math.min(...rates.filter((k) => k > 0));
	if (!Number.isFinite(slowest)) return 24;
	const time = (HALF_LIVES * Math.LN2) / slowest / SECONDS[timeUnit];
	return Number(time.toPrecision(2));
}

export interface FirstConditions {
	temperature: Quantity;
	timeUnit: RunContent['timeUnit'];
	/** mol/L, null where the field is empty. */
	charge: Record<string, number | null>;
	excess: Record<string, number | null>;
	assayed: string[];
	/** Constant part of the expected error, mol/L, and proportional part, %. */
	a: number | null;
	b: number | null;
	/** Guesses by parameter id, where they differ from the scheme's. */
	guesses: Record<string, number | null>;
	/** Parameter ids taken as known. */
	known: string[];
}

function withGuesses(step: StepContent, typed: FirstConditions['guesses']): StepContent {
	const put = (given: Quantity, id: string): Quantity => {
		const value = typed[id];
		return value === undefined || value === null ? given : { ...given, value };
	};
	const { id, forward, reverse } = step;
	return {
		...step,
		forward: { ...forward, kRef: put(forward.kRef, `${id}.forward.kRef`) },
		reverse: !reverse
			? null
			: isEquilibrium(reverse)
				? {
						...reverse,
						equilibriumConstant: put(reverse.equilibriumConstant, `${id}.reverse.equilibriumConstant`)
					}
				: { ...reverse, kRef: put(reverse.kRef, `${id}.reverse.kRef`) }
	};
}

/** The question to the engine; a string says what is missing. */
export function firstPlanRequest(
	scheme: SchemeContent,
	conditions: FirstConditions,
	limits: ReadLimits
): SamplePlanRequest | string {
	const { charge, excess, assayed, a, b, temperature, timeUnit, guesses, known } = conditions;
	if (assayed.length === 0) return 'Choose at least one species that will be assayed.';
	if (a === null) return 'Give the standard deviation that one value is expected to have.';
	if (!Object.values(charge).some((x) => x !== null && x > 0))
		return 'Give the charge of at least one species.';
	const missing = excessOf(scheme).find((id) => !(Number(excess[id]) > 0));
	if (missing) return `Give the concentration of ${missing}, which is held in excess.`;
	const inMolar = (value: number | null) => ({ value: value ?? 0, unit: 'mol/L' });
	return {
		species: scheme.species,
		steps: scheme.steps.filter((s) => s.reactant !== '').map((step) => withGuesses(step, guesses)),
		referenceTemperature: scheme.referenceTemperature,
		run: {
			temperature,
			initial: Object.fromEntries(Object.entries(charge).map(([id, value]) => [id, inMolar(value)])),
			excess: Object.fromEntries(excessOf(scheme).map((id) => [id, inMolar(excess[id])])),
			timeUnit,
			channels: assayed.map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' }))
		},
		fixed: known,
		error: { a, b: (b ?? 0) / 100 },
		confidenceLevel: 0.95,
		channels: [],
		...limits
	};
}
