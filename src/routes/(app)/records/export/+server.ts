import { exportAuditCsv } from '$lib/server/audit/export';
import { auditFilter } from '$lib/server/audit/read';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import type { RequestEvent } from './$types';

/** The filtered trail as a file. */
export const GET = page(async (event: RequestEvent) => {
	const filter = auditFilter.parse(Object.fromEntries(event.url.searchParams));
	const { csv } = await exportAuditCsv(requireActor(event), filter);
	const day = new Date().toISOString().slice(0, 10);
	return new Response(csv, {
		headers: {
			'content-type': 'text/csv; charset=utf-8',
			'content-disposition': `attachment; filename="audit-trail-${day}.csv"`,
			'cache-control': 'no-store'
		}
	});
});
