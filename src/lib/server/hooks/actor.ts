import type { Handle, RequestEvent } from '@sveltejs/kit';
import { actorOfToken } from '../auth/tokens';
import { readActor } from '../auth/actor';
import { AppError } from '../errors';
import { problemResponse, toAppError } from '../http';
import type { Actor } from '../policy';
import { bearerOf } from './origin';

/** Cookie with the group whose work is shown; only ever a choice among the person's own memberships. */
export const GROUP_COOKIE = 'ratewright-group';

const SESSION_COOKIE = 'authjs.session-token';

export function chosenGroup(actor: Actor | null, cookie: string | undefined): string | null {
	if (!actor) return null;
	const own = actor.memberships.map((m) => m.groupId);
	return cookie && own.includes(cookie) ? cookie : (own[0] ?? null);
}

/** The signed-in person of this request; a use case never runs without one. */
export function requireActor(event: { locals: App.Locals }): Actor {
	if (!event.locals.actor) throw new AppError('not-signed-in', 'Sign in first, then try again.');
	return event.locals.actor;
}

/** The group whose work is shown; a person without any membership has none. */
export function requireGroup(event: { locals: App.Locals }): string {
	if (!event.locals.groupId)
		throw new AppError('not-allowed', 'You are not a member of a group yet. Ask a group lead to invite you.');
	return event.locals.groupId;
}

async function whoAsks(event: RequestEvent): Promise<Actor | null> {
	const bearer = bearerOf(event.request);
	if (bearer && event.url.pathname.startsWith('/api/')) return actorOfToken(bearer);
	// Without a session cookie there is nothing to look up, and the library would set cookies of its own.
	if (!event.cookies.getAll().some(({ name }) => name.includes(SESSION_COOKIE))) return null;
	const session = await event.locals.auth();
	if (!session?.person) return null;
	return readActor(session.person);
}

/** Finds out once a request who asks, from the database and never from what the request says of itself. */
export const findActor: Handle = async ({ event, resolve }) => {
	try {
		event.locals.actor = await whoAsks(event);
	} catch (caught) {
		const known = toAppError(caught, { path: event.url.pathname });
		if (event.url.pathname.startsWith('/api/'))
			return problemResponse(known, { 'www-authenticate': 'Bearer error="invalid_token"' });
		throw caught;
	}
	event.locals.groupId = chosenGroup(event.locals.actor, event.cookies.get(GROUP_COOKIE));
	return resolve(event);
};
