import type { Problem } from '$lib/server/http';
import type { TableWork } from '$lib/schemas/sheet-work';

export interface Confirmed {
	id: string;
	number: number;
}

export type ConfirmOutcome = { made: Confirmed } | { refused: string; first: string | null };

export interface ConfirmAsk {
	sheetId: string;
	version: number;
	tableKey: string;
	work: TableWork;
	revisionOf?: { runId: string; version: number; reason: string };
}

/** Asks the service for the run; it settles everything once more by itself and takes nothing on trust. */
export async function confirmTable(ask: ConfirmAsk): Promise<ConfirmOutcome> {
	const { sheetId, version, tableKey, work, revisionOf } = ask;
	try {
		const response = await fetch(`/api/v1/sheets/${sheetId}/runs`, {
			method: 'POST',
			headers: { 'content-type': 'application/json', 'if-match': `"${version}"` },
			body: JSON.stringify({ tableKey, ...work, ...(revisionOf ? { revisionOf } : {}) })
		});
		const body: unknown = await response.json();
		if (response.ok) return { made: body as Confirmed };
		const problem = body as Problem;
		return { refused: problem.detail, first: problem.fields?.[0]?.field ?? null };
	} catch {
		return { refused: 'There is no connection to the service. Nothing is lost; try again.', first: null };
	}
}
