import { redirect } from '@sveltejs/kit';
import { closeSession } from '../../../auth';
import { endThisSession } from '$lib/server/auth/sessions';
import { page } from '$lib/server/http';
import type { PageServerLoadEvent, RequestEvent } from './$types';

export const load = page(({ locals }: PageServerLoadEvent) => {
	if (!locals.actor) redirect(303, '/sign-in');
	return { name: locals.actor.name };
});

export const actions = {
	default: page(async (event: RequestEvent) => {
		if (event.locals.actor) await endThisSession(event.locals.actor);
		await closeSession(event);
		redirect(303, '/sign-in?notice=signed-out');
	})
};
