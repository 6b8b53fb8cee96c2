import { notFound } from '$lib/server/errors';
import { readFit } from '$lib/server/fits/read-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { readWindow } from '$lib/server/windows/read-window';
import type { PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const window = await readWindow(actor, event.params.window);
	if (window.studyId !== event.params.study) throw notFound('window of this study');
	return { window, fit: await readFit(actor, window.fitId) };
});
