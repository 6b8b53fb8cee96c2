/** Sends the work on a sheet to the service, and says what came of it. */
import type { SaveOutcome } from '$lib/client/autosave';
import type { SheetWork } from '$lib/schemas/sheet-work';

/** Somebody else saved meanwhile. */
export interface WorkConflict {
	version: number;
	work: SheetWork;
}

export async function sendWork(
	sheetId: string,
	work: SheetWork,
	version: number
): Promise<SaveOutcome<WorkConflict>> {
	const response = await fetch(`/api/v1/sheets/${sheetId}`, {
		method: 'PATCH',
		headers: { 'content-type': 'application/json', 'if-match': `"${version}"` },
		body: JSON.stringify({ work })
	});
	const body = (await response.json()) as {
		version: number;
		code?: string;
		detail?: string;
		data?: WorkConflict;
	};
	if (response.ok) return { kind: 'saved', version: body.version };
	if (body.code === 'version-changed' && body.data) return { kind: 'conflict', theirs: body.data };
	const again = response.status >= 500 || response.status === 429;
	return { kind: 'failed', message: body.detail ?? 'the service refused it', again };
}
