import { sequence } from '@sveltejs/kit/hooks';
import type { ServerInit } from '@sveltejs/kit';
import { building } from '$app/environment';
import { handle as session } from './auth';
import { findActor } from '$lib/server/hooks/actor';
import { reportError } from '$lib/server/hooks/errors';
import { closeLibraryRoutes, guard } from '$lib/server/hooks/guard';
import { securityHeaders } from '$lib/server/hooks/headers';
import { checkOrigin } from '$lib/server/hooks/origin';
import { announceStop, startService, stopService } from '$lib/server/hooks/startup';

export const init: ServerInit = async () => {
	if (building) return;
	await startService();
	for (const signal of ['SIGTERM', 'SIGINT'] as const) process.once(signal, announceStop);
	process.once('sveltekit:shutdown', () => void stopService());
};

export const handle = sequence(securityHeaders, checkOrigin, closeLibraryRoutes, session, findActor, guard);
export const handleError = reportError;
