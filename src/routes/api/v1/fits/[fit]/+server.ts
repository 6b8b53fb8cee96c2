import type { RequestEvent } from './$types';
import { cancelFit } from '$lib/server/fits/cancel-fit';
import { readFit } from '$lib/server/fits/read-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';

export const GET = api((event: RequestEvent) => readFit(requireActor(event), event.params.fit));

export const DELETE = api((event: RequestEvent) => cancelFit(requireActor(event), event.params.fit));
