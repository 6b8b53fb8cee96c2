import { fitQuestion } from '$lib/schemas/fit-analysis';
import { readJson } from '$lib/server/api/request';
import { askFit } from '$lib/server/fits/analyse-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import type { RequestEvent } from './$types';

/** One question on this fit, answered from its record. */
export const POST = api(async (event: RequestEvent) => {
	const question = await readJson(event.request, fitQuestion);
	const { signal } = event.request;
	return { answer: await askFit(requireActor(event), { fitId: event.params.fit, question, signal }) };
});
