/** Sends sheets to the service, one after the other, and says in words what came of each. */
import type { Problem } from '$lib/server/http';

export interface UploadOutcome {
	fileName: string;
	/** Id of the sheet, new or the one that was there. */
	id: string | null;
	/** Words where the same bytes were read before. */
	duplicate: string | null;
	/** Why it was refused. */
	refused: string | null;
}

interface Answer {
	id: string;
	fileName: string;
	duplicateOf: { message: string } | null;
}

const failed = (fileName: string, refused: string): UploadOutcome => ({
	fileName,
	id: null,
	duplicate: null,
	refused
});

export async function uploadSheet(studyId: string, file: File, signal: AbortSignal): Promise<UploadOutcome> {
	const form = new FormData();
	form.set('file', file, file.name);
	try {
		const response = await fetch(`/api/v1/studies/${studyId}/sheets`, { method: 'POST', body: form, signal });
		const body: unknown = await response.json();
		if (!response.ok) return failed(file.name, (body as Problem).detail);
		const { id, fileName, duplicateOf } = body as Answer;
		return { fileName, id, duplicate: duplicateOf?.message ?? null, refused: null };
	} catch (caught) {
		if (signal.aborted) return failed(file.name, 'Called off; nothing was stored.');
		return failed(
			file.name,
			caught instanceof SyntaxError
				? 'The service gave no readable answer. Try again; if it stays so, tell your admin.'
				: 'There is no connection to the service. Try again when it is back.'
		);
	}
}

/** A table copied in a spreadsheet program comes as text with tabs; a picture or a single word is none. */
export function pastedTable(text: string): File | null {
	const lines = text.split(/\r\n|\r|\n/).filter((line) => line.trim() !== '');
	if (lines.length < 2 || !lines.some((line) => /[\t;,]/.test(line))) return null;
	return new File([text], 'pasted-table.txt', { type: 'text/plain' });
}
