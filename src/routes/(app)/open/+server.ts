import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { can, type Actor } from '$lib/server/policy';
import { listRecipes } from '$lib/server/recipes/list-recipes';
import { listStudies } from '$lib/server/studies/list-studies';
import type { RequestEvent } from './$types';

const PER_GROUP = 5;

interface Found {
	kind: 'study' | 'recipe';
	name: string;
	note: string;
	href: string;
}
type Membership = Actor['memberships'][number];

async function studies(actor: Actor, { groupId, groupName }: Membership, filter: string): Promise<Found[]> {
	if (!can(actor, groupId, 'study.read')) return [];
	const { items } = await listStudies(actor, { groupId, filter, limit: PER_GROUP });
	return items.map((s) => ({ kind: 'study', name: s.name, note: groupName, href: `/studies/${s.id}` }));
}

async function recipes(actor: Actor, { groupId, groupName }: Membership, filter: string): Promise<Found[]> {
	if (!can(actor, groupId, 'recipe.read')) return [];
	const { items } = await listRecipes(actor, { groupId, filter, limit: PER_GROUP });
	return items.map((r) => ({
		kind: 'recipe',
		name: r.title,
		note: `v${r.newest.number} ${r.newest.state}, ${groupName}`,
		href: `/recipes/${r.id}`
	}));
}

/** Studies and recipes by part of their name, in every group into which the person has insight. */
export const GET = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const filter = (event.url.searchParams.get('q') ?? '').slice(0, 80);
	const found = await Promise.all(
		actor.memberships.flatMap((m) => [studies(actor, m, filter), recipes(actor, m, filter)])
	);
	return { items: found.flat() };
});
