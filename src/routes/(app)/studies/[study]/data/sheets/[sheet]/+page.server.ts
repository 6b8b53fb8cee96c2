import { notFound } from '$lib/server/errors';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { readSheet } from '$lib/server/sheets/read-sheet';
import type { PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const { workbook, ...record } = await readSheet(requireActor(event), event.params.sheet);
	if (record.studyId !== event.params.study) throw notFound('sheet of this study');
	// As text: a large grid travels and is taken up much faster than as an object of objects.
	return { record, workbookJson: JSON.stringify(workbook) };
});
