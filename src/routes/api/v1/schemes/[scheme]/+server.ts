import type { RequestEvent } from './$types';
import { answer, readJson, requireVersion } from '$lib/server/api/request';
import { changedScheme, contentOf } from '$lib/server/api/scheme-body';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { readScheme } from '$lib/server/studies/read-scheme';
import { saveScheme } from '$lib/server/studies/save-scheme';

export const GET = api(async (event: RequestEvent) => {
	const view = await readScheme(requireActor(event), event.params.scheme);
	return answer(view, { version: view.version });
});

export const PATCH = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const body = await readJson(event.request, changedScheme);
	const saved = await saveScheme(actor, {
		schemeId: event.params.scheme,
		version: requireVersion(event.request.headers, body.version),
		content: contentOf(body),
		name: body.name
	});
	return answer(saved, { version: saved.version });
});
