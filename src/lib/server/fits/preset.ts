/** The choices behind a fit, so that the next one can begin from them: the form's fields, filled in. */
import type { FitRequest } from '$lib/schemas/fit';
import type { FitForm, KeptChoices, ParameterSetting, ParameterSettings } from '$lib/schemas/fit-form';
import { compileProblem } from '$lib/kinetics/fit/problem';
import { toReported, type Slot } from '$lib/kinetics/fit/slots';
import type { FitView } from './read-fit';
import { centreOf, fitsAnEnergy, type ReferenceChoice } from './reference';

export type FitPreset = Pick<FitForm, 'schemeId' | 'runIds'> &
	KeptChoices & { energies: FitForm['energies'] };

/** Opened by nobody unless somebody asked: has to be asked for again. */
const OPENED = new Set<Slot['kind']>(['amount', 'offset', 'response', 'energy', 'enthalpy']);

/** A response factor of each run is still opened under the id that all runs share. */
const openedAs = (slot: Slot): string =>
	slot.localOf !== null && slot.kind === 'response' ? slot.localOf : slot.id;

function settingOf(slot: Slot, options: FitRequest['options']): ParameterSetting | null {
	const value = Number.isFinite(slot.value)
		? { value: toReported(slot, slot.value), unit: slot.unit }
		: undefined;
	const known = value ? { value } : {};
	if (slot.tie) return { state: 'tied', to: slot.tie.to, factor: slot.tie.factor, ...known };
	if (options.fixed.includes(slot.id)) return { state: 'fixed', ...known };
	const bounds = options.bounds[slot.id];
	if (slot.state === 'fitted' && (bounds || OPENED.has(slot.kind)))
		return { state: 'fitted', ...known, ...bounds };
	return null;
}

export function settingsOf(request: FitRequest): ParameterSettings {
	const { slots } = compileProblem(request);
	return Object.fromEntries(
		[...slots.values()].flatMap((slot) => {
			const setting = settingOf(slot, request.options);
			return setting ? [[setting.state === 'fitted' ? openedAs(slot) : slot.id, setting]] : [];
		})
	);
}

/** Values that a person typed hold at the reference temperature of that fit: the next one keeps it. */
function referenceOf(request: FitRequest): ReferenceChoice {
	if (!fitsAnEnergy(request)) return 'auto';
	const { value, unit } = request.referenceTemperature;
	return unit === 'degC' && value === centreOf(request.runs) ? 'centre' : 'scheme';
}

export function presetOf(fit: Pick<FitView, 'request' | 'scheme' | 'runs'>): FitPreset {
	const { options } = fit.request;
	const { model, perChannel, a, b } = options.weighting;
	const channels = new Set(fit.request.runs.flatMap((r) => r.channels.map((c) => c.id)));
	const shared = a === undefined ? {} : Object.fromEntries([...channels].map((id) => [id, { a, b: b ?? 0 }]));
	const { useTimeZeroRow } = options;
	return {
		schemeId: fit.scheme.id,
		runIds: fit.runs.map((r) => r.id),
		energies: 'missing',
		reference: referenceOf(fit.request),
		weighting: model,
		errors: { ...shared, ...perChannel },
		parameters: settingsOf(fit.request),
		local: options.local ?? [],
		criterion: options.criterion ?? 'least squares',
		timeZeroRow: useTimeZeroRow === undefined ? 'as charged' : useTimeZeroRow ? 'use' : 'leave',
		confidence: Number((100 * options.confidenceLevel).toFixed(4)),
		starts: options.starts,
		seed: options.seed
	};
}
