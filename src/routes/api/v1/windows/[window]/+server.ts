import type { RequestEvent } from './$types';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { readWindow } from '$lib/server/windows/read-window';

export const GET = api((event: RequestEvent) => readWindow(requireActor(event), event.params.window));
