import type { RequestEvent } from './$types';
import { fitRequest } from '$lib/schemas/fit';
import { readJson } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { fitDirectly } from '$lib/server/kinetics/fit-directly';

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	return fitDirectly(actor, await readJson(event.request, fitRequest), event.request.signal);
});
