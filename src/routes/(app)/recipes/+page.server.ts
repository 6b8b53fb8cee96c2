import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { can } from '$lib/server/policy';
import { listRecipes } from '$lib/server/recipes/list-recipes';
import type { PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const { groupId } = event.locals;
	const filter = (event.url.searchParams.get('q') ?? '').slice(0, 80);
	const after = event.url.searchParams.get('after') ?? undefined;
	if (!groupId || !can(actor, groupId, 'recipe.read')) return { filter, after: null, recipes: null };
	return { filter, after: after ?? null, recipes: await listRecipes(actor, { groupId, filter, after }) };
});
