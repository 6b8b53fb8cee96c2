import { redirect, type Handle } from '@sveltejs/kit';
import { AppError } from '../errors';
import { problemResponse } from '../http';

/** What somebody may open without signing in; everything else is for signed-in people. */
const PUBLIC = [
	/^\/$/,
	/^\/healthz$/,
	/^\/sign-in$/,
	/^\/sign-out$/,
	/^\/invitation\/[^/]+$/,
	/^\/reset(\/[^/]+)?$/,
	/^\/api\/v1\/(openapi\.json|docs)$/
];

export const isPublic = (pathname: string): boolean => PUBLIC.some((pattern) => pattern.test(pathname));

/** Path to come back to after signing in: on this service only, never another address. */
export function safeNext(next: string | null | undefined, fallback = '/studies'): string {
	if (!next || !next.startsWith('/') || next.startsWith('//') || next.includes('\\')) return fallback;
	const base = 'http://here.invalid';
	try {
		const url = new URL(next, base);
		// Taking dots out can leave two slashes in front, which a browser reads as another address.
		const leaves = url.origin !== base || url.pathname.startsWith('//');
		return leaves ? fallback : url.pathname + url.search + url.hash;
	} catch {
		return fallback;
	}
}

/** First of two guards: a page or call is closed unless it is public; each use case then asks the permission table. */
export const guard: Handle = async ({ event, resolve }) => {
	const { url, route, locals } = event;
	const isApi = url.pathname.startsWith('/api/');
	// A null character ends a text for the database: no filter or id holds one.
	if (url.search.includes('%00'))
		return problemResponse(new AppError('invalid', 'This address holds a null character. Leave it out.'));
	if (isApi && !locals.actor && !isPublic(url.pathname))
		return problemResponse(
			new AppError('not-signed-in', 'Sign in, or send a token: Authorization: Bearer <token>.'),
			{ 'www-authenticate': 'Bearer' }
		);
	if (isApi && route.id === null)
		return problemResponse(
			new AppError('not-found', 'There is no such call. /api/v1/openapi.json lists them all.')
		);
	if (route.id !== null && !locals.actor && !isPublic(url.pathname))
		redirect(303, `/sign-in?next=${encodeURIComponent(url.pathname + url.search)}`);
	return resolve(event);
};

/** Signing in and out has pages of our own; the routes that the session library brings stay shut. */
export const closeLibraryRoutes: Handle = ({ event, resolve }) =>
	/^\/auth(\/|$)/.test(event.url.pathname)
		? new Response('There is no such page.', { status: 404 })
		: resolve(event);
