import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { readStudy } from '$lib/server/studies/read-study';
import type { LayoutServerLoadEvent } from './$types';

export const load = page(async (event: LayoutServerLoadEvent) => {
	// Stations save by themselves and then ask for this again by name.
	event.depends('study:frame');
	return { view: await readStudy(requireActor(event), event.params.study) };
});
