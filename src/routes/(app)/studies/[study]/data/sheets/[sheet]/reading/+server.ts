import { jsonText } from '$lib/server/api/large-text';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { readReading } from '$lib/server/sheets/read-reading';
import type { RequestEvent } from './$types';

/** The sheet as received, cell by cell: fetched beside the page, which is there before a large one has come. */
export const GET = api(async (event: RequestEvent) => {
	const { study, sheet } = event.params;
	return jsonText(event.request, await readReading(requireActor(event), study, sheet));
});
