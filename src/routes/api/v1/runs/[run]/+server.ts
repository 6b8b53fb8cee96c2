import type { RequestEvent } from './$types';
import { answer } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { readRun } from '$lib/server/runs/read-run';

export const GET = api(async (event: RequestEvent) => {
	const view = await readRun(requireActor(event), event.params.run);
	return answer(view, { version: view.version });
});
