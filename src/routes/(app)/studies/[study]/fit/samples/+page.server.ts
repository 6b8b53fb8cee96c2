import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { readStudy } from '$lib/server/studies/read-study';
import type { PageServerLoadEvent } from './$types';

/** Samples planned before there is any fit: everything comes from the schemes of the study. */
export const load = page(async (event: PageServerLoadEvent) => {
	await readStudy(requireActor(event), event.params.study);
	return { chosen: event.url.searchParams.get('scheme') };
});
