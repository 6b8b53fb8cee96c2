import type { RequestEvent } from './$types';
import { samplePlanRequest } from '$lib/schemas/fit-plan';
import { readJson } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { planSamplesDirectly } from '$lib/server/kinetics/plan-samples-directly';

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	return planSamplesDirectly(actor, await readJson(event.request, samplePlanRequest), event.request.signal);
});
