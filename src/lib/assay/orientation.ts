/**
 * Tables whose times run across the top, one row a series. They are read on the sheet turned over its diagonal, where row and
 * column change places; what leaves the reader carries the addresses of the sheet as received.
 */
import type { Block, ColumnMapping, GridCell, GridSheet, Mapping } from '$lib/schemas/sheet';
import { address, columnLetter, rangeText } from './grid';
import { someOf } from './wording';

export const turnBlock = (b: Block): Block => ({
	firstRow: b.firstColumn,
	lastRow: b.lastColumn,
	firstColumn: b.firstRow,
	lastColumn: b.lastRow
});

/** The sheet with rows as columns; only the rows from `first` to `last` where they are given. */
export function turnSheet(sheet: GridSheet, first = 1, last = Infinity): GridSheet {
	const rows = new Map<number, GridCell[]>();
	for (const row of sheet.rows) {
		if (row.r < first || row.r > last) continue;
		for (const [column, ...rest] of row.c) {
			const own = rows.get(column) ?? [];
			rows.set(column, own);
			own.push([row.r, ...rest] as GridCell);
		}
	}
	return {
		...sheet,
		rows: [...rows].sort((a, b) => a[0] - b[0]).map(([r, c]) => ({ r, c })),
		merges: sheet.merges.map(([r1, c1, r2, c2]) => [c1, r1, c2, r2]),
		hiddenRows: sheet.hiddenColumns,
		hiddenColumns: sheet.hiddenRows,
		lastRow: sheet.lastColumn,
		lastColumn: sheet.lastRow
	};
}

/** The mapping as the rules see it: in columns, on the turned sheet where times run across. */
export function asColumns(mapping: Mapping): Mapping {
	const { across } = mapping;
	if (!across) return mapping;
	const block = turnBlock(mapping.block);
	const columns = across.rows
		.filter(({ row }) => row >= block.firstColumn && row <= block.lastColumn)
		.map(({ row, ...rest }): ColumnMapping => ({ column: row, ...rest }));
	const headerRows = across.headerColumns.filter((c) => c < block.firstRow);
	return { ...mapping, block, headerRows, columns, leftOutRows: across.leftOutColumns };
}

/** The mapping as it lies on the sheet as received; the reverse of `asColumns`. */
export function asOnSheet(mapping: Mapping): Mapping {
	if (!mapping.across) return mapping;
	const rows = mapping.columns.map(({ column, ...rest }) => ({ row: column, ...rest }));
	return {
		...mapping,
		block: turnBlock(mapping.block),
		headerRows: [],
		columns: [],
		leftOutRows: [],
		across: { headerColumns: mapping.headerRows, leftOutColumns: mapping.leftOutRows, rows }
	};
}

/** How messages and findings name the places of a table: samples are rows and series columns, or the other way round. */
export class Places {
	constructor(readonly across: boolean) {}

	/** Address on the sheet as received. */
	at(row: number, column: number): string {
		return this.across ? address(column, row) : address(row, column);
	}

	range(block: Block): string {
		return rangeText(this.across ? turnBlock(block) : block);
	}

	/** The letter of a series' column, or the number of its row. */
	mark(column: number): string {
		return this.across ? String(column) : columnLetter(column);
	}

	/** "column B", or "row 2" where times run across. */
	series(column: number): string {
		return `${this.across ? 'row' : 'column'} ${this.mark(column)}`;
	}

	/** "columns B–D", "rows 2, 4". */
	manySeries(columns: number[]): string {
		return spanText(this.across ? 'row' : 'column', columns, (c) => this.mark(c));
	}

	/** "row 4", "rows 4–6" for samples, or "columns D–F". */
	samples(rows: number[]): string {
		return spanText(this.across ? 'column' : 'row', rows, (r) => this.sample(r));
	}

	/** "4", or "D" where each sample is a column. */
	sample(row: number): string {
		return this.across ? columnLetter(row) : String(row);
	}

	/** What one sample is on the sheet. */
	get line(): 'row' | 'column' {
		return this.across ? 'column' : 'row';
	}
}

function spanText(word: string, numbers: number[], name: (n: number) => string): string {
	const one = numbers.length === 1;
	const run = !one && numbers[numbers.length - 1] - numbers[0] === numbers.length - 1;
	const list = run
		? `${name(numbers[0])}–${name(numbers[numbers.length - 1])}`
		: someOf(numbers.map(name), 8);
	return `${word}${one ? '' : 's'} ${list}`;
}
