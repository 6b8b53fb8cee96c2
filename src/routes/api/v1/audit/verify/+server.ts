import { verifyTrail } from '$lib/server/audit/verify';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import type { RequestEvent } from './$types';

/** Goes along the hash chain and names the first entry that does not fit, if there is one. */
export const GET = api((event: RequestEvent) => verifyTrail(requireActor(event)));
