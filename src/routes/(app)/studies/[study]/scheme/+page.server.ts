import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { listRuns } from '$lib/server/runs/list-runs';
import { readRun } from '$lib/server/runs/read-run';
import type { PageServerLoadEvent } from './$types';

/** Runs beside the curves: the newest of them are enough for comparing by eye; the fit takes them all. */
const RUNS_SHOWN = 12;

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const runs = (await listRuns(actor, event.params.study)).slice(-RUNS_SHOWN);
	const views = await Promise.all(runs.map((run) => readRun(actor, run.id)));
	return {
		runs: views.map(({ id, name, content }) => ({ id, name, content })),
		wanted: event.url.searchParams.get('scheme')
	};
});
