import type { RequestEvent } from './$types';
import { streamFit } from '$lib/server/fits/stream-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';

/** A browser sends the number of the last event by itself; a script may name it as ?after=. */
function lastEventId(event: RequestEvent): number {
	const given = event.request.headers.get('last-event-id') ?? event.url.searchParams.get('after');
	return given !== null && /^\d{1,9}$/.test(given) ? Number(given) : 0;
}

export const GET = api((event: RequestEvent) =>
	streamFit(requireActor(event), event.params.fit, lastEventId(event))
);
