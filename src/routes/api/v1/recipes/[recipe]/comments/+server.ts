import type { RequestEvent } from './$types';
import { once } from '$lib/server/api/idempotency';
import { answer, readJson } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { commentBody } from '$lib/server/recipes/api-bodies';
import { numberOf } from '$lib/server/recipes/newest-number';
import { commentOnRecipe } from '$lib/server/recipes/comment-on-recipe';

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const recipeId = event.params.recipe;
	const body = await readJson(event.request, commentBody);
	return once(actor, event.request, body, async () => {
		const number = await numberOf(actor, recipeId, body.number);
		return answer(await commentOnRecipe(actor, { ...body, recipeId, number }), { status: 201 });
	});
});
