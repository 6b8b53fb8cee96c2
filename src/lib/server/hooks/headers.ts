import type { Handle } from '@sveltejs/kit';
import { log } from '../log';
import { settings } from '../settings';

const ALWAYS: Record<string, string> = {
	'x-content-type-options': 'nosniff',
	'x-frame-options': 'DENY',
	'referrer-policy': 'same-origin',
	'permissions-policy': 'camera=(), microphone=(), geolocation=(), payment=()',
	'cross-origin-opener-policy': 'same-origin',
	'cross-origin-resource-policy': 'same-origin'
};

function setAll(response: Response): void {
	for (const [name, value] of Object.entries(ALWAYS)) response.headers.set(name, value);
	if (settings().ORIGIN.startsWith('https:'))
		response.headers.set('strict-transport-security', 'max-age=31536000');
	// What a signed-in person saw must not come back from a shared computer's cache: going back in the browser's
	// history shows a stored page without asking, unless it was never stored.
	if (!response.headers.has('cache-control')) response.headers.set('cache-control', 'private, no-store');
}

export const securityHeaders: Handle = async ({ event, resolve }) => {
	const began = performance.now();
	const response = await resolve(event);
	setAll(response);
	log().debug({
		method: event.request.method,
		path: event.url.pathname,
		status: response.status,
		ms: Math.round(performance.now() - began)
	});
	return response;
};
