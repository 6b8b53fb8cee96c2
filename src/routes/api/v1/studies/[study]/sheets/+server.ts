import type { RequestEvent } from './$types';
import { sha256 } from '$lib/server/audit/canonical';
import { once } from '$lib/server/api/idempotency';
import { answer } from '$lib/server/api/request';
import { readUpload } from '$lib/server/api/upload';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { listSheets } from '$lib/server/sheets/list-sheets';
import { receiveSheet } from '$lib/server/sheets/receive-sheet';
import { requireUpload } from '$lib/server/sheets/require-upload';

export const GET = api(async (event: RequestEvent) => ({
	items: await listSheets(requireActor(event), event.params.study)
}));

export const POST = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	// Before the body is taken in: who may not upload does not get to send it.
	await requireUpload(actor, event.params.study);
	const upload = await readUpload(event.request);
	const content = { name: upload.fileName, sha256: sha256(upload.bytes) };
	return once(actor, event.request, content, async () => {
		const { proposal, ...received } = await receiveSheet(actor, { ...upload, studyId: event.params.study });
		const status = received.duplicateOf ? 200 : 201;
		const location = `/api/v1/sheets/${received.id}`;
		return answer({ ...received, ...proposal }, { status, location, version: received.version });
	});
});
