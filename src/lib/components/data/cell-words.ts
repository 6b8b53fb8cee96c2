/** What the line under the sheet says of a cell. */
import { displayText, parseAddress, type SheetView } from '$lib/assay';

/** As the sheet shows it. */
export function originalText(view: SheetView, cell: string): string {
	const at = parseAddress(cell);
	return at ? displayText(view.workbook, view.cell(at.row, at.column)) : '';
}

/** What the file holds, where the display says less: the number behind a duration, a date, a rounded value. */
export function storedText(view: SheetView, cell: string): string {
	const at = parseAddress(cell);
	const value = at ? view.cell(at.row, at.column)?.[1] : null;
	return typeof value === 'number' && String(value) !== originalText(view, cell) ? String(value) : '';
}

export function hiddenText(view: SheetView, cell: string): string {
	const at = parseAddress(cell);
	if (!at) return '';
	const what = [view.rowHidden(at.row) ? 'row' : '', view.columnHidden(at.column) ? 'column' : ''];
	const said = what.filter(Boolean).join(' and ');
	return said ? `${said} hidden in the file` : '';
}
