import { compareFits } from '$lib/server/fits/compare-fits';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import type { PageServerLoadEvent } from './$types';

export const load = page((event: PageServerLoadEvent) =>
	compareFits(requireActor(event), {
		studyId: event.params.study,
		fitIds: event.url.searchParams.getAll('fits')
	})
);
