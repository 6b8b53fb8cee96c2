import { readConfirmation } from '$lib/server/fits/confirm-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import type { RequestEvent } from './$types';

/** A revision of an unused run with the fit's curves and prediction band, for the chart. */
export const GET = api((event: RequestEvent) =>
	readConfirmation(requireActor(event), { fitId: event.params.fit, revisionId: event.params.revision })
);
