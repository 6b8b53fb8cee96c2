import { notFound } from '$lib/server/errors';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { readSheetRecord } from '$lib/server/sheets/read-sheet';
import type { PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const record = await readSheetRecord(requireActor(event), event.params.sheet);
	if (record.studyId !== event.params.study) throw notFound('sheet of this study');
	return { record };
});
