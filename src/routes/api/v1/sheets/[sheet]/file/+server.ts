import type { RequestEvent } from './$types';
import { attachment } from '$lib/server/api/attachment';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { downloadSheet } from '$lib/server/sheets/download-sheet';

export const GET = api(async (event: RequestEvent) => {
	const file = await downloadSheet(requireActor(event), event.params.sheet);
	return attachment(file.bytes, file.fileName, { digest: file.sha256 });
});
