import { z } from 'zod';
import { auditFilter, listAudit } from '$lib/server/audit/read';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import type { RequestEvent } from './$types';

const query = auditFilter.extend({
	/** Entries before this sequence number: the `next` of the page before. */
	after: z.coerce.number().int().min(1).optional(),
	limit: z.coerce.number().int().min(1).max(500).default(100)
});

/** The audit trail of the groups that the caller may inspect, newest entry first. */
export const GET = api(async (event: RequestEvent) => {
	const { after, limit, ...filter } = query.parse(Object.fromEntries(event.url.searchParams));
	return listAudit(requireActor(event), { filter, before: after, limit });
});
