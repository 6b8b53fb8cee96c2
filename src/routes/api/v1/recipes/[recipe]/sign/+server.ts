import type { RequestEvent } from './$types';
import { answer, readJson, requireVersion } from '$lib/server/api/request';
import { notAllowed } from '$lib/server/errors';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { signBody } from '$lib/server/recipes/api-bodies';
import { numberOf } from '$lib/server/recipes/newest-number';
import { signRecipe } from '$lib/server/recipes/sign-recipe';

/** For signed-in people alone: a token can never sign. */
export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	if (actor.scopes) throw notAllowed('A token can never sign. Sign in as yourself in the browser.');
	const body = await readJson(event.request, signBody);
	const recipeId = event.params.recipe;
	const done = await signRecipe(actor, {
		...body,
		recipeId,
		number: await numberOf(actor, recipeId, body.number),
		version: requireVersion(event.request.headers, body.version)
	});
	return answer(done, { version: done.version });
});
