import type { RequestEvent } from './$types';
import { fitQuestion } from '$lib/schemas/fit-analysis';
import { readJson } from '$lib/server/api/request';
import { askFit } from '$lib/server/fits/analyse-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';

/** One question on a fit, answered from its record: decision quantities, profiles, curves, plans. Nothing is kept. */
export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const question = await readJson(event.request, fitQuestion);
	const { signal } = event.request;
	return { answer: await askFit(actor, { fitId: event.params.fit, question, signal }) };
});
