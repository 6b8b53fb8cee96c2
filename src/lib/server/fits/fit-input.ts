import { optionsOf, type FitForm } from '$lib/schemas/fit-form';
import type { PlanFitInput } from './plan-fit';

/** From the page's form to what the use cases of a fit take. */
export function fitInput(studyId: string, form: FitForm): PlanFitInput {
	const { schemeId, runIds, energies, reference, charges, timeZero, parameters } = form;
	return {
		studyId,
		schemeId,
		runIds,
		energies,
		reference,
		opened: { charges, timeZero },
		settings: parameters,
		options: optionsOf(form)
	};
}
