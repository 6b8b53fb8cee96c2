import type { RequestEvent } from './$types';
import { solveRequest } from '$lib/schemas/solve';
import { readJson } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { solveDirectly } from '$lib/server/kinetics/solve-directly';

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	return solveDirectly(actor, await readJson(event.request, solveRequest), event.request.signal);
});
