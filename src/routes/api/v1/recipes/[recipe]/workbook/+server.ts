import type { RequestEvent } from './$types';
import { attachment } from '$lib/server/api/attachment';
import { queryNumber } from '$lib/server/api/request';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import { exportWorkbook } from '$lib/server/workbook/export-workbook';

const XLSX = 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet';

/** The QA workbook of a version (`?version=`, else the newest). */
export const GET = api(async (event: RequestEvent) => {
	const number = queryNumber(event.url, 'version', 0, [1, 1_000_000]) || undefined;
	const file = await exportWorkbook(requireActor(event), { recipeId: event.params.recipe, number });
	return attachment(file.bytes, file.fileName, { mediaType: XLSX, digest: file.sha256 });
});
