import type { RequestEvent } from './$types';
import { once } from '$lib/server/api/idempotency';
import { answer, readJson } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { shareBody } from '$lib/server/recipes/api-bodies';
import { numberOf } from '$lib/server/recipes/newest-number';
import { shareRecipe } from '$lib/server/recipes/share-recipe';

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const recipeId = event.params.recipe;
	const body = await readJson(event.request, shareBody);
	return once(actor, event.request, body, async () => {
		const number = await numberOf(actor, recipeId, body.number);
		const { groupId } = body;
		return answer(await shareRecipe(actor, { recipeId, number, groupId }), { status: 201 });
	});
});
