import type { RequestEvent } from './$types';
import { confirmRunSchema } from '$lib/schemas/sheet-work';
import { once } from '$lib/server/api/idempotency';
import { answer, ifMatch, readJson } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { confirmRun } from '$lib/server/sheets/confirm-run';

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const body = await readJson(event.request, confirmRunSchema);
	const version = ifMatch(event.request.headers) ?? undefined;
	return once(actor, event.request, body, async () => {
		const made = await confirmRun(actor, { ...body, sheetId: event.params.sheet, version });
		return answer(made, { status: 201, location: `/api/v1/runs/${made.id}`, version: made.version });
	});
});
