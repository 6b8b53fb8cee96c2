import type { RequestEvent } from './$types';
import { once } from '$lib/server/api/idempotency';
import { answer, readJson, requireVersion } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { withdrawBody } from '$lib/server/recipes/api-bodies';
import { numberOf } from '$lib/server/recipes/newest-number';
import { withdrawRecipe } from '$lib/server/recipes/withdraw-recipe';

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const recipeId = event.params.recipe;
	const body = await readJson(event.request, withdrawBody);
	return once(actor, event.request, body, async () => {
		const number = await numberOf(actor, recipeId, body.number);
		const version = requireVersion(event.request.headers, body.version);
		const done = await withdrawRecipe(actor, { ...body, recipeId, number, version });
		return answer(done, { version: done.version });
	});
});
