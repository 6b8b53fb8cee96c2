import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { requireSiteAdmin } from '$lib/server/policy';
import type { LayoutServerLoadEvent } from './$types';

/** For everybody else these pages are not there; each use case asks again. */
export const load = page((event: LayoutServerLoadEvent) => {
	requireSiteAdmin(requireActor(event));
	return {};
});
