import { redirect } from '@sveltejs/kit';
import { navRights } from '$lib/server/nav-rights';
import { ROLE_NAMES } from '$lib/server/policy';
import type { LayoutServerLoad } from './$types';

/** The frame: who is signed in, in which group, and where they may go. */
export const load: LayoutServerLoad = ({ locals, url }) => {
	const { actor, groupId } = locals;
	if (!actor) redirect(303, `/sign-in?next=${encodeURIComponent(url.pathname)}`);
	return {
		person: { id: actor.userId, name: actor.name, email: actor.email },
		groups: actor.memberships.map((m) => ({ id: m.groupId, name: m.groupName, role: ROLE_NAMES[m.role] })),
		groupId,
		rights: navRights(actor, groupId)
	};
};
