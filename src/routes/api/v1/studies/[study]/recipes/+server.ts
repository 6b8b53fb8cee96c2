import type { RequestEvent } from './$types';
import { once } from '$lib/server/api/idempotency';
import { answer, readJson } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { createRecipe } from '$lib/server/recipes/create-recipe';
import { listStudyRecipes } from '$lib/server/recipes/list-recipes';
import { createRecipeForm } from '$lib/schemas/recipe';

export const GET = api((event: RequestEvent) => listStudyRecipes(requireActor(event), event.params.study));

/** A first draft from a fit (and a window of it). */
export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const body = await readJson(event.request, createRecipeForm.strict());
	return once(actor, event.request, body, async () => {
		const made = await createRecipe(actor, { ...body, studyId: event.params.study });
		return answer(made, { status: 201, location: `/api/v1/recipes/${made.id}`, version: made.version });
	});
});
