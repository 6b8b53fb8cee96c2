import { fail, redirect } from '@sveltejs/kit';
import { readFitForm } from '$lib/schemas/fit-form';
import { AppError, notFound } from '$lib/server/errors';
import { fitInput } from '$lib/server/fits/fit-input';
import { listFits } from '$lib/server/fits/list-fits';
import { presetOf } from '$lib/server/fits/preset';
import { readFit } from '$lib/server/fits/read-fit';
import { startFit } from '$lib/server/fits/start-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { listRuns } from '$lib/server/runs/list-runs';
import type { Actions, PageServerLoadEvent, RequestEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	event.depends('study:fits');
	const from = event.url.searchParams.get('from');
	const [fits, runs, begun] = await Promise.all([
		listFits(actor, event.params.study),
		listRuns(actor, event.params.study),
		from ? readFit(actor, from) : null
	]);
	if (begun && begun.studyId !== event.params.study) throw notFound('fit of this study');
	return { fits, runs, preset: begun && presetOf(begun), presetNumber: begun?.number ?? null };
});

async function start(event: RequestEvent) {
	const actor = requireActor(event);
	const form = readFitForm(await event.request.formData());
	if (!form.success) return fail(422, { message: form.error.issues[0].message });
	try {
		const fit = await startFit(actor, fitInput(event.params.study, form.data));
		redirect(303, `/studies/${event.params.study}/fit/${fit.id}${fit.reused ? '?equal' : ''}`);
	} catch (caught) {
		if (caught instanceof AppError && ['invalid', 'too-many-requests'].includes(caught.code))
			return fail(caught.status, { message: caught.message });
		throw caught;
	}
}

export const actions: Actions = { start: page(start) };
