/** Rows of numbers that belong to no table (B28): they are pointed out, so that nothing of a sheet goes missing in silence. */
import type { Finding, GridWorkbook } from '$lib/schemas/sheet';
import { Places } from './orientation';
import { isDataRow, lookAt } from './rows';
import { blockOnSheet, type FoundTable } from './tables';
import { capital } from './wording';

export function strayRows(workbook: GridWorkbook, tables: FoundTable[]): Finding[] {
	return workbook.sheets.flatMap((sheet) => {
		const own = tables.filter((t) => t.sheet === sheet.name);
		if (own.length === 0) return [];
		const covered = own.map(rowsOf);
		const top = Math.min(...covered.map(([first]) => first));
		const stray = sheet.rows
			.filter((row) => row.r > top && !covered.some(([first, last]) => row.r >= first && row.r <= last))
			.filter((row) => row.c.length > 1 && isDataRow(lookAt(workbook, row)))
			.map((row) => row.r);
		if (stray.length === 0) return [];
		const where = new Places(false).samples(stray);
		return [
			{
				id: `B28:${sheet.name}!stray`.slice(0, 200),
				level: 'note' as const,
				rule: 'B28',
				sheet: sheet.name,
				cells: stray.slice(0, 200).map((r) => `A${r}`),
				count: stray.length,
				found: `${where} with numbers outside every table`,
				expected: 'tables with a header row and a time column',
				message: `${capital(where)} of "${sheet.name}" ${stray.length === 1 ? 'holds' : 'hold'} numbers and ${stray.length === 1 ? 'belongs' : 'belong'} to no table; not used. Mark ${stray.length === 1 ? 'it' : 'them'} by hand if ${stray.length === 1 ? 'it belongs' : 'they belong'} to the data.`,
				options: [],
				open: false
			}
		];
	});
}

/** First and last row of the sheet that a table takes up, headers and footers counted in. */
function rowsOf(t: FoundTable): [number, number] {
	const { firstRow, lastRow } = blockOnSheet(t);
	if (t.across) return [firstRow, lastRow];
	const rows = [firstRow, lastRow, ...t.headerRows, ...t.limitRows, ...t.footerRows.map((f) => f.row)];
	return [Math.min(...rows), Math.max(...rows)];
}
