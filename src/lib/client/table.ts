export interface TableColumn<Row> {
	key: string;
	label: string;
	/** Shown muted in the head, and copied in brackets after the label. */
	unit?: string;
	align?: 'left' | 'right';
	/** Full value: what is copied. Left out, `row[key]` is taken. */
	value?: (row: Row) => string | number | null | undefined;
	/** What is shown, where it differs from the value (rounded, with a sign). */
	text?: (row: Row) => string;
	/** This column names the row. */
	head?: boolean;
}

export function cellValue<Row>(column: TableColumn<Row>, row: Row): string | number | null {
	const value = column.value ? column.value(row) : (row as Record<string, unknown>)[column.key];
	return typeof value === 'number' || typeof value === 'string' ? value : null;
}

/** Text that a spreadsheet would take for a formula is marked as text. */
const inert = (text: string): string =>
	(/^[=+\-@\t\r]/.test(text) ? `'${text}` : text).replace(/[\t\r\n]+/g, ' ');

/** The table as tab-separated text: header with units, numbers in full precision. */
export function toTsv<Row>(columns: TableColumn<Row>[], rows: readonly Row[]): string {
	const head = columns.map((c) => inert(c.unit ? `${c.label} [${c.unit}]` : c.label));
	const body = rows.map((row) =>
		columns.map((c) => {
			const value = cellValue(c, row);
			if (value === null) return '';
			return typeof value === 'number' ? String(value) : inert(value);
		})
	);
	return [head, ...body].map((cells) => cells.join('\t')).join('\n');
}
