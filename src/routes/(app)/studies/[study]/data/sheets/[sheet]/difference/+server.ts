import { json } from '@sveltejs/kit';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { compareSheets } from '$lib/server/sheets/compare-sheets';
import type { RequestEvent } from './$types';

/** Cell by cell against the file of a run (`run`) or against another sheet (`from`). */
export const GET = api(async (event: RequestEvent) => {
	const asked = event.url.searchParams;
	const comparison = await compareSheets(requireActor(event), {
		sheetId: event.params.sheet,
		runId: asked.get('run'),
		fromSheetId: asked.get('from')
	});
	return json(comparison);
});
