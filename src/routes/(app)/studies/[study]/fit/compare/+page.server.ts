import { notFound } from '$lib/server/errors';
import { readFit } from '$lib/server/fits/read-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import type { PageServerLoadEvent } from './$types';

const MOST = 6;

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const ids = [...new Set(event.url.searchParams.getAll('fits'))].slice(0, MOST);
	const fits = await Promise.all(ids.map((id) => readFit(actor, id)));
	if (fits.some((fit) => fit.studyId !== event.params.study)) throw notFound('fit of this study');
	return { fits: fits.filter((fit) => fit.report !== null) };
});
