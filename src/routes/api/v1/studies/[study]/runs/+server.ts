import type { RequestEvent } from './$types';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { listRuns } from '$lib/server/runs/list-runs';

export const GET = api(async (event: RequestEvent) => ({
	items: await listRuns(requireActor(event), event.params.study)
}));
