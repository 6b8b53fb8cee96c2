import { readFitForm } from '$lib/schemas/fit-form';
import { fitInput } from '$lib/server/fits/fit-input';
import { planFit } from '$lib/server/fits/plan-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import type { RequestEvent } from './$types';

/** What the chosen scheme and runs would have fitted and held fixed, before anything is started. */
export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const form = readFitForm(await event.request.formData());
	if (!form.success) throw form.error;
	const plan = await planFit(actor, fitInput(event.params.study, form.data));
	const { runs, parameters, available, issues, ready, request } = plan;
	const channels = [
		...new Map(
			request.runs.flatMap((r) => r.channels).map((c) => [c.id, { id: c.id, unit: c.unit }])
		).values()
	];
	return { runs, parameters, available, issues, ready, channels };
});
