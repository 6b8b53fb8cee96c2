import type { RequestEvent } from './$types';
import { z } from 'zod';
import { answer, readJson, requireVersion } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { readStudy } from '$lib/server/studies/read-study';
import { studyChanges, updateStudy } from '$lib/server/studies/update-study';

export const GET = api(async (event: RequestEvent) => {
	const view = await readStudy(requireActor(event), event.params.study);
	return answer(view, { version: view.study.version });
});

export const PATCH = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const body = await readJson(event.request, studyChanges.extend({ version: z.int().positive().optional() }));
	const version = requireVersion(event.request.headers, body.version);
	const saved = await updateStudy(actor, { ...body, studyId: event.params.study, version });
	return answer(saved, { version: saved.version });
});
