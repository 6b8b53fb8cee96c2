import { optionsOf, readFitForm } from '$lib/schemas/fit-form';
import { planFit } from '$lib/server/fits/plan-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import type { RequestEvent } from './$types';

/** What the chosen scheme and runs would have fitted and held fixed, before anything is started. */
export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const form = readFitForm(await event.request.formData());
	if (!form.success) throw form.error;
	const { schemeId, runIds, energies, charges, timeZero } = form.data;
	const plan = await planFit(actor, {
		studyId: event.params.study,
		schemeId,
		runIds,
		energies,
		opened: { charges, timeZero },
		options: optionsOf(form.data)
	});
	const { runs, parameters, issues, ready } = plan;
	return { runs, parameters, issues, ready };
});
