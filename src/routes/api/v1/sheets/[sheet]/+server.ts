import type { RequestEvent } from './$types';
import { z } from 'zod';
import { sheetWorkSchema } from '$lib/schemas/sheet-work';
import { answer, readJson, requireVersion } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { readSheet } from '$lib/server/sheets/read-sheet';
import { saveSheetWork } from '$lib/server/sheets/save-sheet-work';

export const GET = api(async (event: RequestEvent) => {
	const view = await readSheet(requireActor(event), event.params.sheet);
	return answer(view, { version: view.version });
});

const body = z.strictObject({ work: sheetWorkSchema, version: z.int().positive().optional() });

export const PATCH = api(async (event: RequestEvent) => {
	const actor = requireActor(event);
	const { work, version } = await readJson(event.request, body);
	const saved = await saveSheetWork(actor, {
		sheetId: event.params.sheet,
		version: requireVersion(event.request.headers, version),
		work
	});
	return answer(saved, { version: saved.version });
});
