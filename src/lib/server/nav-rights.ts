import { can, roleIn, type Actor } from './policy';

/** Which sections of the service the person may open in this group; each use case asks the permission table again. */
export function navRights(actor: Actor, groupId: string | null) {
	const may = (action: Parameters<typeof can>[2]) => groupId !== null && can(actor, groupId, action);
	return {
		studies: may('study.read'),
		recipes: may('recipe.read'),
		// A site admin reads the entries that belong to no group: sign-ins, people, settings.
		records: may('audit.read') || actor.siteAdmin,
		group: groupId !== null && roleIn(actor, groupId) !== null,
		admin: actor.siteAdmin
	};
}
