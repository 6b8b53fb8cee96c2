import { notFound } from '$lib/server/errors';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { recipePage } from '$lib/server/recipes/page-data';
import type { PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	if (!/^[1-9]\d{0,6}$/.test(event.params.number)) throw notFound('recipe version');
	return recipePage(actor, event.params.recipe, Number(event.params.number));
});
