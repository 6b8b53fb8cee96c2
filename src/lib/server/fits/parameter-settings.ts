/**
 * What a person said of single parameters, put into the request: starting values, fixed values, charges, energies, time zero
 * and response factors opened for fitting. Bounds, ties and "held fixed" are options of the request and stand there.
 */
import type { ParameterSetting, ParameterSettings } from '$lib/schemas/fit-form';
import type { FitRequest } from '$lib/schemas/fit';
import { isFitted, type Fittable, type Quantity } from '$lib/schemas/quantity';
import type { RunContent } from '$lib/schemas/run';
import { isEquilibrium, type RateLawContent, type StepContent } from '$lib/schemas/scheme';

const known = (given: Fittable | undefined): Quantity | undefined =>
	given === undefined ? undefined : isFitted(given) ? given.guess : given;

/** The value as this setting wants it: opened from a guess, or held at a value. */
function settled(given: Fittable | undefined, { state, value }: ParameterSetting): Fittable | undefined {
	const start = value ?? known(given);
	if (state === 'fitted') return { fit: true, ...(start ? { guess: start } : {}) };
	// Tied: the tie rules; the value only has to be there.
	return start ?? given;
}

function lawWith(law: RateLawContent, prefix: string, settings: ParameterSettings): RateLawContent {
	const rate = settings[`${prefix}.kRef`];
	const energy = settings[`${prefix}.activationEnergy`];
	const activationEnergy = energy ? settled(law.activationEnergy, energy) : law.activationEnergy;
	return {
		...law,
		kRef: rate?.value ?? law.kRef,
		...(activationEnergy === undefined ? {} : { activationEnergy })
	};
}

function stepWith(step: StepContent, settings: ParameterSettings): StepContent {
	const { reverse } = step;
	const forward = lawWith(step.forward, `${step.id}.forward`, settings);
	if (!reverse) return { ...step, forward };
	if (!isEquilibrium(reverse))
		return { ...step, forward, reverse: lawWith(reverse, `${step.id}.reverse`, settings) };
	const constant = settings[`${step.id}.reverse.equilibriumConstant`];
	const heat = settings[`${step.id}.reverse.enthalpy`];
	const enthalpy = heat ? settled(reverse.enthalpy, heat) : reverse.enthalpy;
	return {
		...step,
		forward,
		reverse: {
			...reverse,
			equilibriumConstant: constant?.value ?? reverse.equilibriumConstant,
			...(enthalpy === undefined ? {} : { enthalpy })
		}
	};
}

function runWith(run: RunContent, settings: ParameterSettings): RunContent {
	const initial = Object.entries(run.initial).map(([species, amount]) => {
		const setting = settings[`${run.id}.initial.${species}`];
		return [species, setting ? (settled(amount, setting) ?? amount) : amount] as const;
	});
	const offset = settings[`${run.id}.timeOffset`];
	const timeOffset = offset ? settled(run.timeOffset, offset) : run.timeOffset;
	const channels = run.channels.map((channel) => {
		const setting = settings[`${channel.id}.responseFactor`];
		const responseFactor = setting ? settled(channel.responseFactor, setting) : channel.responseFactor;
		return { ...channel, ...(responseFactor === undefined ? {} : { responseFactor }) };
	});
	return {
		...run,
		initial: Object.fromEntries(initial),
		channels,
		...(timeOffset === undefined ? {} : { timeOffset })
	};
}

export function withParameterSettings(request: FitRequest, settings: ParameterSettings): FitRequest {
	if (Object.keys(settings).length === 0) return request;
	return {
		...request,
		steps: request.steps.map((step) => stepWith(step, settings)),
		runs: request.runs.map((run) => runWith(run, settings))
	};
}

/** Ids of quantities that the request could open for fitting but does not name yet: time zeros and response factors. */
export function unopened(request: FitRequest): { id: string; kind: 'offset' | 'response'; unit: string }[] {
	const offsets = request.runs
		.filter((run) => run.timeOffset === undefined)
		.map((run) => ({ id: `${run.id}.timeOffset`, kind: 'offset' as const, unit: run.timeUnit }));
	const channels = request.runs.flatMap((run) => run.channels.filter((c) => c.responseFactor === undefined));
	const factors = [...new Set(channels.map((c) => c.id))].map((id) => ({
		id: `${id}.responseFactor`,
		kind: 'response' as const,
		unit: '1'
	}));
	return [...offsets, ...factors];
}
