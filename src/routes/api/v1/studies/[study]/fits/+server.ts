import type { RequestEvent } from './$types';
import { fitStart } from '$lib/schemas/fit-start';
import { once } from '$lib/server/api/idempotency';
import { answer, queryNumber, readJson } from '$lib/server/api/request';
import { listFits } from '$lib/server/fits/list-fits';
import { startFit } from '$lib/server/fits/start-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';

export const GET = api(async (event: RequestEvent) => {
	const limit = queryNumber(event.url, 'limit', 50, [1, 100]);
	const after = event.url.searchParams.get('after') ?? undefined;
	const items = await listFits(requireActor(event), event.params.study, { after, limit });
	return { items, next: items.length === limit ? (items.at(-1)?.id ?? null) : null };
});

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const body = await readJson(event.request, fitStart);
	return once(actor, event.request, body, async () => {
		const started = await startFit(actor, { ...body, studyId: event.params.study });
		const location = `/api/v1/fits/${started.id}`;
		return answer({ ...started, events: `${location}/events` }, { status: 202, location });
	});
});
