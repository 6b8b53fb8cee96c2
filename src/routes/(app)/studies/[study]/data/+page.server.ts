import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { listRuns } from '$lib/server/runs/list-runs';
import { settings } from '$lib/server/settings';
import { listSheets } from '$lib/server/sheets/list-sheets';
import type { PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const [sheets, runs] = await Promise.all([
		listSheets(actor, event.params.study),
		listRuns(actor, event.params.study)
	]);
	return { sheets, runs, limitMb: settings().UPLOAD_LIMIT_MB };
});
