import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { can } from '$lib/server/policy';
import { listStudies } from '$lib/server/studies/list-studies';
import type { PageServerLoadEvent } from './$types';

const PAGE_SIZE = 25;

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const { groupId } = event.locals;
	const filter = (event.url.searchParams.get('q') ?? '').slice(0, 80);
	const after = event.url.searchParams.get('after') ?? undefined;
	if (!groupId) return { filter, after: null, canCreate: false, studies: null };
	return {
		filter,
		after: after ?? null,
		canCreate: can(actor, groupId, 'study.write'),
		studies: await listStudies(actor, { groupId, filter, after, limit: PAGE_SIZE })
	};
});
