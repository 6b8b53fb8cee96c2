import type { RequestEvent } from './$types';
import { once } from '$lib/server/api/idempotency';
import { answer, readJson } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { versionBody } from '$lib/server/recipes/api-bodies';

import { startNewVersion } from '$lib/server/recipes/start-new-version';

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const recipeId = event.params.recipe;
	const body = await readJson(event.request, versionBody);
	return once(actor, event.request, body, async () => {
		const made = await startNewVersion(actor, { ...body, recipeId });
		return answer(made, { status: 201, version: made.version });
	});
});
