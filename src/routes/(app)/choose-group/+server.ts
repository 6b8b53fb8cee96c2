import { redirect } from '@sveltejs/kit';
import { GROUP_COOKIE, requireActor } from '$lib/server/hooks/actor';
import { settings } from '$lib/server/settings';
import type { RequestHandler } from './$types';

const ONE_YEAR_S = 365 * 86400;

/** Works in another of the person's own groups from now on, in this browser. */
export const POST: RequestHandler = async ({ request, locals, cookies }) => {
	const actor = requireActor({ locals });
	const wanted = (await request.formData()).get('group');
	if (typeof wanted === 'string' && actor.memberships.some((m) => m.groupId === wanted))
		cookies.set(GROUP_COOKIE, wanted, {
			path: '/',
			httpOnly: true,
			sameSite: 'lax',
			secure: settings().ORIGIN.startsWith('https:'),
			maxAge: ONE_YEAR_S
		});
	redirect(303, '/');
};
