/** What of a sheet its file hides, in words: shown beside the picture, never dropped in silence. */
import { columnLetter } from '$lib/assay';
import type { GridSheet } from '$lib/schemas/sheet';

const MOST = 6;

function spans(list: [number, number][], name: (n: number) => string): string {
	const words = list.slice(0, MOST).map(([a, b]) => (a === b ? name(a) : `${name(a)}–${name(b)}`));
	return words.join(', ') + (list.length > MOST ? ` and ${list.length - MOST} more` : '');
}

/** Null where nothing is hidden. Spans beyond what the sheet holds are of no interest. */
export function hiddenWords(sheet: GridSheet): string | null {
	const rows = sheet.hiddenRows.filter(([first]) => first <= sheet.lastRow);
	const columns = sheet.hiddenColumns.filter(([first]) => first <= sheet.lastColumn);
	const parts = [
		...(sheet.state === 'visible' ? [] : ['this sheet']),
		...(rows.length ? [`rows ${spans(rows, String)}`] : []),
		...(columns.length ? [`columns ${spans(columns, columnLetter)}`] : [])
	];
	const filter = sheet.filter ? ` A filter is on: ${sheet.filter}.` : '';
	if (parts.length === 0) return filter ? filter.trim() : null;
	return `Hidden in the file, shown here: ${parts.join('; ')}.${filter}`;
}
