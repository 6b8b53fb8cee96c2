import { fail } from '@sveltejs/kit';
import { AppError, notFound } from '$lib/server/errors';
import { cancelFit } from '$lib/server/fits/cancel-fit';
import { readFit } from '$lib/server/fits/read-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import type { Actions, PageServerLoadEvent, RequestEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	event.depends('study:fit');
	const fit = await readFit(requireActor(event), event.params.fit);
	if (fit.studyId !== event.params.study) throw notFound('fit of this study');
	return { fit };
});

async function cancel(event: RequestEvent) {
	try {
		await cancelFit(requireActor(event), event.params.fit);
		return { cancelled: true };
	} catch (caught) {
		if (caught instanceof AppError && caught.code === 'wrong-state')
			return fail(422, { message: caught.message });
		throw caught;
	}
}

export const actions: Actions = { cancel: page(cancel) };
