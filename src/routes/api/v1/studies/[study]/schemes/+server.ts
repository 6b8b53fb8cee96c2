import type { RequestEvent } from './$types';
import { once } from '$lib/server/api/idempotency';
import { answer, readJson } from '$lib/server/api/request';
import { contentOf, newScheme } from '$lib/server/api/scheme-body';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { createScheme } from '$lib/server/studies/create-scheme';

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const body = await readJson(event.request, newScheme);
	return once(actor, event.request, body, async () => {
		const made = await createScheme(actor, {
			studyId: event.params.study,
			name: body.name,
			content: contentOf(body)
		});
		return answer(made, { status: 201, location: `/api/v1/schemes/${made.id}`, version: made.version });
	});
});
