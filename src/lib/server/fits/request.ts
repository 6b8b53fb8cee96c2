import type { FitFinding, FitOptions, FitRequest } from '$lib/schemas/fit';
import type { RunContent } from '$lib/schemas/run';
import { asFitted, logSpan, usesLog } from '$lib/schemas/temperature-log';
import { isFitted, type Fittable } from '$lib/schemas/quantity';
import {
	isEquilibrium,
	type RateLawContent,
	type SchemeContent,
	type StepContent
} from '$lib/schemas/scheme';
import { toSi } from '$lib/kinetics/units';
import { atReference, type ReferenceChoice } from './reference';

/** Which activation energies a fit is to find: those that the scheme leaves out, every one, or none. */
export type EnergiesChoice = 'missing' | 'all' | 'scheme';

/** What a person opens for fitting besides the constants. */
export interface OpenedQuantities {
	/** Every charge that is not zero is fitted, from the entered amount; rows at time zero then count as data. */
	charges?: boolean;
	/** A shift of the time axis is fitted for each run (sampling or quench lag). */
	timeZero?: boolean;
}

export interface RequestRun {
	number: number;
	content: RunContent;
}

export interface BuiltRequest {
	request: FitRequest;
	issues: FitFinding[];
}

/** Below this, runs count as one temperature. */
const SAME_TEMPERATURE_K = 0.5;

const finding = (
	level: FitFinding['level'],
	code: string,
	message: string,
	more: Partial<FitFinding> = {}
): FitFinding => ({ level, code, message, ...more });

export const requestRunId = (number: number): string => `r${number}`;

function withoutStrangers(run: RequestRun, known: Set<string>, issues: FitFinding[]): RunContent {
	const { content, number } = run;
	const runs = [requestRunId(number)];
	const channels = content.channels.filter((channel) => {
		const strange = Object.keys(channel.weights).filter((id) => !known.has(id));
		if (strange.length === 0) return true;
		const name = channel.label ?? channel.id;
		const message = `Run ${number}: column ${name} sees ${strange.join(', ')}, which this scheme does not have; the column is left out of this fit.`;
		issues.push(finding('caution', 'channel-outside-scheme', message, { runs }));
		return false;
	});
	if (channels.length === 0) {
		const message = `Run ${number} measures nothing that this scheme has. Add its species to the scheme, or leave the run out.`;
		issues.push(finding('stop', 'run-outside-scheme', message, { runs }));
	}
	const initial = Object.entries(content.initial).filter(([species, amount]) => {
		if (known.has(species)) return true;
		if (isFitted(amount) || amount.value !== 0)
			issues.push(
				finding(
					'caution',
					'charge-outside-scheme',
					`Run ${number} was charged with ${species}, which this scheme does not have.`,
					{ runs }
				)
			);
		return false;
	});
	return { ...content, id: requestRunId(number), channels, initial: Object.fromEntries(initial) };
}

/** The log stays on the run's record; whether it also counts in the fit is said with the fit. */
function withTemperature(run: RequestRun, issues: FitFinding[]): RequestRun {
	const { content, number } = run;
	const span = logSpan(content);
	if (!span) return run;
	const runs = [requestRunId(number)];
	const range = `from ${span.lowC} to ${span.highC} °C`;
	if (!usesLog(content)) {
		const message = `Run ${number} counts as held at the stated ${span.statedC} °C; its log (${range}) is on the run's record only.`;
		issues.push(finding('note', 'temperature-stated', message, { runs }));
	} else {
		const message = `Run ${number}: the measured temperature log (${range}) is the program of the run in this fit.`;
		issues.push(finding('note', 'temperature-log-used', message, { runs }));
	}
	return { ...run, content: asFitted(content) };
}

/** Without an activation energy a constant is the same at every temperature, and a program changes nothing. */
function noteIdleLog(runs: RunContent[], steps: StepContent[], issues: FitFinding[]): void {
	const logged = runs.filter((run) => run.temperatureLog).flatMap((run) => run.id ?? []);
	if (logged.length === 0 || !steps.flatMap(laws).some((law) => law.activationEnergy === undefined)) return;
	const message =
		'A temperature log changes nothing at a step without an activation energy. Give the scheme one, or have it fitted over several temperatures.';
	issues.push(finding('caution', 'log-without-energy', message, { runs: logged }));
}

const laws = (step: StepContent): RateLawContent[] => [
	step.forward,
	...(step.reverse && !isEquilibrium(step.reverse) ? [step.reverse] : [])
];

const lacksEnergy = (scheme: SchemeContent): boolean =>
	scheme.steps.flatMap(laws).some((law) => law.activationEnergy === undefined);

function energyToFit(given: Fittable | undefined): Fittable {
	if (given === undefined) return { fit: true };
	return isFitted(given) ? given : { fit: true, guess: given };
}

/** The steps with these energies opened for fitting. */
function openEnergies(steps: StepContent[], choice: EnergiesChoice): StepContent[] {
	const open = (given: Fittable | undefined) =>
		given === undefined || choice === 'all' ? energyToFit(given) : given;
	const law = (content: RateLawContent): RateLawContent => ({
		...content,
		activationEnergy: open(content.activationEnergy)
	});
	return steps.map((step) => {
		const { reverse } = step;
		if (!reverse) return { ...step, forward: law(step.forward) };
		return {
			...step,
			forward: law(step.forward),
			reverse: isEquilibrium(reverse) ? { ...reverse, enthalpy: open(reverse.enthalpy) } : law(reverse)
		};
	});
}

interface Temperatures {
	lowK: number;
	highK: number;
}

function temperaturesOf(runs: RunContent[]): Temperatures {
	const kelvins = runs.map((run) => toSi(run.temperature, 'temperature'));
	return { lowK: Math.min(...kelvins), highK: Math.max(...kelvins) };
}

const celsius = (kelvin: number): string => `${Number((kelvin - 273.15).toFixed(2))} °C`;

/**
 * At one temperature without activation energies the constants are those of that temperature: the record then says so,
 * instead of naming the scheme's reference temperature for numbers that do not belong to it.
 */
function atOneTemperature(scheme: SchemeContent, at: Temperatures, issues: FitFinding[]): SchemeContent {
	const reference = toSi(scheme.referenceTemperature, 'temperature');
	if (Math.abs(reference - at.lowK) <= SAME_TEMPERATURE_K) return scheme;
	if (!lacksEnergy(scheme)) return scheme;
	const message = `All runs are at ${celsius(at.lowK)} and the scheme has no activation energies: the constants are those at ${celsius(at.lowK)}, not at the scheme's reference temperature of ${celsius(reference)}.`;
	issues.push(finding('note', 'reference-is-run-temperature', message));
	return { ...scheme, referenceTemperature: { value: Number((at.lowK - 273.15).toFixed(4)), unit: 'degC' } };
}

function overTemperatures(
	scheme: SchemeContent,
	at: Temperatures,
	choice: EnergiesChoice,
	issues: FitFinding[]
): SchemeContent {
	const span = `${celsius(at.lowK)} to ${celsius(at.highK)}`;
	if (choice === 'scheme') {
		if (lacksEnergy(scheme))
			issues.push(
				finding(
					'caution',
					'energy-missing',
					`The runs go from ${span}, but steps without an activation energy are taken to have the same constant at each of these temperatures.`
				)
			);
		return scheme;
	}
	if (choice === 'missing' && !lacksEnergy(scheme)) return scheme;
	const message = `The runs go from ${span}: ${choice === 'all' ? 'all' : 'missing'} activation energies are fitted together with the constants.`;
	issues.push(finding('note', 'energies-fitted', message));
	return { ...scheme, steps: openEnergies(scheme.steps, choice) };
}

function openInRun(content: RunContent, opened: OpenedQuantities): RunContent {
	const openCharge = (amount: Fittable): Fittable =>
		isFitted(amount) || amount.value === 0 ? amount : { fit: true, guess: amount };
	return {
		...content,
		...(opened.charges
			? {
					initial: Object.fromEntries(
						Object.entries(content.initial).map(([species, amount]) => [species, openCharge(amount)])
					)
				}
			: {}),
		...(opened.timeZero ? { timeOffset: content.timeOffset ?? { fit: true as const } } : {})
	};
}

/** From a scheme version and run revisions to what the engine is asked. Says what it left out and what it changed. */
export function buildRequest(
	scheme: SchemeContent,
	runs: RequestRun[],
	options: FitOptions,
	energies: EnergiesChoice = 'missing',
	opened: OpenedQuantities = {},
	reference: ReferenceChoice = 'auto'
): BuiltRequest {
	const issues: FitFinding[] = [];
	const known = new Set(scheme.species.map((s) => s.id));
	const contents = runs.map((run) =>
		openInRun(withoutStrangers(withTemperature(run, issues), known, issues), opened)
	);
	const at = temperaturesOf(contents);
	const { species, steps, referenceTemperature } =
		at.highK - at.lowK <= SAME_TEMPERATURE_K
			? atOneTemperature(scheme, at, issues)
			: atReference(overTemperatures(scheme, at, energies, issues), contents, reference, issues);
	noteIdleLog(contents, steps, issues);
	return { request: { species, steps, referenceTemperature, runs: contents, options }, issues };
}
