import { auditChoices, auditFilter, listAudit } from '$lib/server/audit/read';
import { verifyTrail } from '$lib/server/audit/verify';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import type { PageServerLoadEvent, RequestEvent } from './$types';

const PAGE_SIZE = 50;

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const { searchParams } = event.url;
	const typed = Object.fromEntries(
		['group', 'study', 'object', 'objectType', 'type', 'person', 'from', 'to'].map((name) => [
			name,
			searchParams.get(name) ?? ''
		])
	);
	const filter = auditFilter.safeParse(typed);
	const given = searchParams.get('before') ?? '';
	const before = /^[1-9]\d{0,14}$/.test(given) ? Number(given) : undefined;
	const [trail, choices] = await Promise.all([
		// A filter that cannot be read narrows nothing away silently: it says so and shows no entries.
		filter.success ? listAudit(actor, { filter: filter.data, before, limit: PAGE_SIZE }) : null,
		auditChoices(actor)
	]);
	return {
		trail,
		choices,
		typed,
		before: before ?? null,
		narrowed: Object.values(typed).some((v) => v !== ''),
		problem: filter.success ? null : filter.error.issues[0].message
	};
});

export const actions = {
	verify: page(async (event: RequestEvent) => ({ check: await verifyTrail(requireActor(event)) }))
};
