import { fail, redirect } from '@sveltejs/kit';
import { readFitForm } from '$lib/schemas/fit-form';
import { AppError } from '$lib/server/errors';
import { fitInput } from '$lib/server/fits/fit-input';
import { listFits } from '$lib/server/fits/list-fits';
import { startFit } from '$lib/server/fits/start-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { listRuns } from '$lib/server/runs/list-runs';
import type { Actions, PageServerLoadEvent, RequestEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	event.depends('study:fits');
	const [fits, runs] = await Promise.all([
		listFits(actor, event.params.study),
		listRuns(actor, event.params.study)
	]);
	return { fits, runs };
});

async function start(event: RequestEvent) {
	const actor = requireActor(event);
	const form = readFitForm(await event.request.formData());
	if (!form.success) return fail(422, { message: form.error.issues[0].message });
	try {
		const fit = await startFit(actor, fitInput(event.params.study, form.data));
		redirect(303, `/studies/${event.params.study}/fit/${fit.id}${fit.reused ? '?equal' : ''}`);
	} catch (caught) {
		if (caught instanceof AppError && caught.code === 'invalid')
			return fail(422, { message: caught.message });
		throw caught;
	}
}

export const actions: Actions = { start: page(start) };
