import { redirect } from '@sveltejs/kit';
import { navRights } from '$lib/server/nav-rights';
import type { PageServerLoad } from './$types';

/** The first page: where this person's work is. */
export const load: PageServerLoad = ({ locals }) => {
	if (!locals.actor) redirect(303, '/sign-in');
	const rights = navRights(locals.actor, locals.groupId);
	if (rights.studies) redirect(303, '/studies');
	if (rights.group) redirect(303, '/shared');
	redirect(303, rights.admin ? '/admin' : '/account');
};
