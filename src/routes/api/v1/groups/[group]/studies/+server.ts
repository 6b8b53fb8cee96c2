import type { RequestEvent } from './$types';
import { studyForm } from '$lib/schemas/study';
import { once } from '$lib/server/api/idempotency';
import { answer, queryNumber, readJson } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { createStudy } from '$lib/server/studies/create-study';
import { listStudies } from '$lib/server/studies/list-studies';

export const GET = api((event: RequestEvent) => {
	const { url, params } = event;
	return listStudies(requireActor(event), {
		groupId: params.group,
		filter: url.searchParams.get('filter') ?? undefined,
		after: url.searchParams.get('after') ?? undefined,
		limit: queryNumber(url, 'limit', 25, [1, 100])
	});
});

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const form = await readJson(event.request, studyForm);
	return once(actor, event.request, form, async () => {
		const made = await createStudy(actor, { ...form, groupId: event.params.group });
		return answer(made, { status: 201, location: `/api/v1/studies/${made.id}`, version: made.version });
	});
});
