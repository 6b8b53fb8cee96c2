import { serviceHealth } from '$lib/server/health';
import type { RequestHandler } from './$types';

/** For the process manager: 200 while the database answers, else 503. Tells nothing about content. */
export const GET: RequestHandler = async () => {
	const health = await serviceHealth();
	return new Response(JSON.stringify(health), {
		status: health.status === 'up' ? 200 : 503,
		headers: { 'content-type': 'application/json', 'cache-control': 'no-store' }
	});
};
