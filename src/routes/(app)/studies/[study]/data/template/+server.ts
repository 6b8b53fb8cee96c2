import { attachment } from '$lib/server/api/attachment';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { studyTemplate } from '$lib/server/sheets/study-template';
import type { RequestEvent } from './$types';

const XLSX = 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet';

/** A blank workbook with the columns of the study's scheme. */
export const GET = page(async (event: RequestEvent) => {
	const file = await studyTemplate(requireActor(event), event.params.study);
	return attachment(file.bytes, file.fileName, { mediaType: XLSX });
});
