import type { RequestEvent } from './$types';
import { firstFormRequest } from '$lib/schemas/window';
import { once } from '$lib/server/api/idempotency';
import { answer, readJson } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { computeWindow } from '$lib/server/windows/compute-window';
import { readWindow } from '$lib/server/windows/read-window';
import { windowsOfFit } from '$lib/server/windows/windows-of-fit';

export const GET = api(async (event: RequestEvent) => ({
	items: await windowsOfFit(requireActor(event), event.params.fit)
}));

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const input = await readJson(event.request, firstFormRequest);
	return once(actor, event.request, input, async () => {
		const made = await computeWindow(actor, { fitId: event.params.fit, input });
		const view = await readWindow(actor, made.id);
		return answer(view, { status: 201, location: `/api/v1/windows/${made.id}` });
	});
});
