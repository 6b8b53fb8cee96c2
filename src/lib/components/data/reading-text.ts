/** The grid of a sheet as the service keeps it: fetched once for as long as the same sheet is looked at. */
import type { GridWorkbook } from '$lib/schemas/sheet';
import type { Problem } from '$lib/server/http';

export type FetchedReading = { workbook: GridWorkbook; text: string } | { refused: string };

let last: { key: string; reading: Promise<FetchedReading> } | null = null;

/** A sheet never changes: coming back to it, or saving, fetches nothing anew. What failed is tried again. */
export function readingOf(study: string, sheet: string): Promise<FetchedReading> {
	const key = `${study} ${sheet}`;
	if (last?.key === key) return last.reading;
	const reading = fetchReading(`/studies/${study}/data/sheets/${sheet}/reading`);
	last = { key, reading };
	void reading.then((outcome) => {
		if ('refused' in outcome && last?.reading === reading) last = null;
	});
	return reading;
}

async function fetchReading(href: string): Promise<FetchedReading> {
	try {
		const response = await fetch(href);
		const text = await response.text();
		if (!response.ok) return { refused: (JSON.parse(text) as Problem).detail };
		return { workbook: JSON.parse(text) as GridWorkbook, text };
	} catch (caught) {
		return {
			refused:
				caught instanceof SyntaxError
					? 'The service gave no readable answer. Load the page again; if it stays so, tell your admin.'
					: 'There is no connection to the service. Load the page again when it is back.'
		};
	}
}
