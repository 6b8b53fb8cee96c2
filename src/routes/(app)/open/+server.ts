import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { can } from '$lib/server/policy';
import { listStudies } from '$lib/server/studies/list-studies';
import type { RequestEvent } from './$types';

const PER_GROUP = 6;

/** Studies by part of their name or decision, in every group into which the person has insight. */
export const GET = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const filter = (event.url.searchParams.get('q') ?? '').slice(0, 80);
	const groups = actor.memberships.filter((m) => can(actor, m.groupId, 'study.read'));
	const pages = await Promise.all(
		groups.map((m) => listStudies(actor, { groupId: m.groupId, filter, limit: PER_GROUP }))
	);
	const items = pages.flatMap((page, i) =>
		page.items.map((study) => ({
			kind: 'study',
			name: study.name,
			note: groups[i].groupName,
			href: `/studies/${study.id}`
		}))
	);
	return { items };
});
