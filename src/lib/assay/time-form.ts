/** How the cells of the time column carry their unit themselves, for the label of the column; plain numbers do not. */
import type { GridWorkbook, Mapping } from '$lib/schemas/sheet';
import { asColumns } from './orientation';
import { headersOf, viewOf } from './tables';
import { readTime } from './times';

export type TimeForm = 'h:mm' | 'mm:ss' | 'dates with times' | 'unit in the cells';

/** Told by the first cell of the column that is no plain number: a typed 0 may stand above durations. Null when all are plain. */
export function timeForm(workbook: GridWorkbook, confirmed: Mapping): TimeForm | null {
	const mapping = asColumns(confirmed);
	const view = viewOf(workbook, mapping.sheet, mapping.across !== undefined);
	const column = mapping.columns.find((c) => c.role === 'time')?.column;
	if (!view || column === undefined) return null;
	for (const row of view.filledRows(mapping.block.firstRow, mapping.block.lastRow)) {
		const { kind } = readTime(view.workbook, view.mergedCell(row, column), mapping.decimal);
		if (kind === 'worded') return 'unit in the cells';
		if (kind === 'stamp') return 'dates with times';
		if (kind !== 'serial' && kind !== 'colon') continue;
		const unit = headersOf(view, mapping).get(column)?.unit;
		return unit?.of === 'duration' ? unit.form : 'h:mm';
	}
	return null;
}
