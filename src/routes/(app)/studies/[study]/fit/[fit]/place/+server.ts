import { fitPlace } from '$lib/server/fits/fit-place';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import type { RequestEvent } from './$types';

/** How many fits will be begun before this one, for a page that waits. */
export const GET = api((event: RequestEvent) => fitPlace(requireActor(event), event.params.fit));
