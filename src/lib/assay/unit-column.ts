/** A column "Unit" beside the values of a long list: the common unit is the column's, any other is that cell's own (B5). */
import type { Mapping, ValueUnit } from '$lib/schemas/sheet';
import type { CellReading } from './cells';
import type { Examination } from './examination';
import type { SheetView } from './grid';
import { readUnit } from './units';
import { isUnitWord } from './words';

/** The column whose header says unit; 0 when there is none. */
export function unitColumn(
	view: SheetView,
	mapping: Pick<Mapping, 'headerRows' | 'columns' | 'layout'>
): number {
	if (mapping.layout !== 'long') return 0;
	const heads = (column: number) => mapping.headerRows.some((r) => isUnitWord(view.text(r, column)));
	return mapping.columns.find((c) => c.role === 'ignore' && heads(c.column))?.column ?? 0;
}

/** The unit that most rows state; null when none does. */
export function commonUnit(view: SheetView, rows: number[], column: number): ValueUnit | null {
	const counts = new Map<ValueUnit, number>();
	for (const row of rows) {
		const unit = readUnit(view.text(row, column));
		if (unit?.of === 'value') counts.set(unit.unit, (counts.get(unit.unit) ?? 0) + 1);
	}
	return [...counts].sort((a, b) => b[1] - a[1])[0]?.[0] ?? null;
}

/** A number whose row states another unit than the column has, read as one that carries its unit. */
export function withOwnUnit(
	ex: Examination,
	reading: CellReading,
	row: number,
	column: number,
	own: ValueUnit | null
): CellReading {
	if (column === 0 || reading.kind !== 'number') return reading;
	const text = ex.shown(row, column);
	const unit = readUnit(text);
	if (unit?.of !== 'value' || unit.unit === own) return reading;
	return { kind: 'with unit', value: reading.value, unit, text: `${reading.value} ${text}` };
}
