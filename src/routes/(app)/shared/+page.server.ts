import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { listShared } from '$lib/server/recipes/read-shared';
import type { PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const { groupId } = event.locals;
	const after = event.url.searchParams.get('after') ?? undefined;
	return { after: after ?? null, shared: groupId ? await listShared(actor, { groupId, after }) : null };
});
