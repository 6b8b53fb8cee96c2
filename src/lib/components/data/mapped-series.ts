/** The series of a table, columns or, where times run across, rows: dealt with alike. `column` is then the number of the row. */
import { columnLetter } from '$lib/assay';
import { asColumns, asOnSheet, turnBlock } from '$lib/assay/orientation';
import type { Block, ColumnMapping, Mapping } from '$lib/schemas/sheet';

export const seriesOf = (mapping: Mapping): ColumnMapping[] => asColumns(mapping).columns;

/** "B", or "row 4". */
export const seriesMark = (mapping: Mapping, place: number): string =>
	mapping.across ? `row ${place}` : columnLetter(place);

export const seriesTitle = (mapping: Mapping, place: number): string =>
	mapping.across ? `Row ${place}` : `Column ${columnLetter(place)}`;

/** The mapping with one series read otherwise. */
export function withSeries(mapping: Mapping, place: number, next: Partial<ColumnMapping>): Mapping {
	const own = asColumns(mapping);
	const columns = own.columns.map((c) => (c.column === place ? { ...c, ...next } : c));
	return asOnSheet({ ...own, columns });
}

/** The mapping on another block: what lies in it keeps its meaning, headers inside it become data. */
export function withBlock(mapping: Mapping, block: Block): Mapping {
	const own = asColumns(mapping);
	const turned = mapping.across ? turnBlock(block) : block;
	return asOnSheet({
		...own,
		block: turned,
		headerRows: own.headerRows.filter((r) => r < turned.firstRow),
		columns: own.columns.filter((c) => c.column >= turned.firstColumn && c.column <= turned.lastColumn)
	});
}

/** Series that are new to a block, as the reader proposes them, beside those that it had. */
export function withAddedSeries(mapping: Mapping, proposed: Mapping): Mapping {
	if ((mapping.across === undefined) !== (proposed.across === undefined)) return mapping;
	const own = asColumns(mapping);
	const added = seriesOf(proposed).filter((c) => !own.columns.some((k) => k.column === c.column));
	if (added.length === 0) return mapping;
	return asOnSheet({ ...own, columns: [...own.columns, ...added].sort((a, b) => a.column - b.column) });
}

/** Header rows of a mapping as a drawn block takes them; null where times run across and headers are columns. */
export const headerRowsOf = (mapping: Mapping): number[] | null => (mapping.across ? null : mapping.headerRows);
