import type { RequestEvent } from './$types';
import { answer, queryNumber, readJson, requireVersion } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { patchBody } from '$lib/server/recipes/api-bodies';
import { numberOf } from '$lib/server/recipes/newest-number';
import { readRecipe } from '$lib/server/recipes/read-recipe';
import { saveRecipe } from '$lib/server/recipes/save-recipe';

export const GET = api(async (event: RequestEvent) => {
	const number = queryNumber(event.url, 'version', 0, [1, 1_000_000]);
	const view = await readRecipe(requireActor(event), event.params.recipe, number || undefined);
	return answer(view, { version: view.shown.version });
});

/** Saves a draft. */
export const PATCH = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const body = await readJson(event.request, patchBody);
	const saved = await saveRecipe(actor, {
		recipeId: event.params.recipe,
		number: await numberOf(actor, event.params.recipe, body.number),
		version: requireVersion(event.request.headers, body.version),
		content: body.content
	});
	return answer(saved, { version: saved.version });
});
