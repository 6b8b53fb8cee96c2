/** The part of xlsx-populate (which ships no types) that this service uses. */
declare module 'xlsx-populate' {
	type CellContent = string | number | boolean | Date | null | undefined;
	export interface Cell {
		value(): unknown;
		value(value: CellContent | CellContent[][]): Cell;
		formula(): string | undefined;
		formula(formula: string): Cell;
		style(name: string, value: unknown): Cell;
		style(styles: Record<string, unknown>): Cell;
		address(): string;
	}
	export interface Column {
		width(width: number): Column;
		style(styles: Record<string, unknown>): Column;
	}
	export interface Row {
		style(styles: Record<string, unknown>): Row;
	}
	export interface Sheet {
		name(): string;
		name(name: string): Sheet;
		cell(row: number, column: number): Cell;
		cell(address: string): Cell;
		column(column: number): Column;
		row(row: number): Row;
		usedRange(): { value(): unknown[][] } | undefined;
		freezePanes(columns: number, rows: number): Sheet;
		printOptions(name: string, value: boolean): Sheet;
		delete(): Workbook;
	}
	export interface Workbook {
		sheet(nameOrIndex: string | number): Sheet;
		sheets(): Sheet[];
		addSheet(name: string): Sheet;
		properties(): unknown;
		outputAsync(): Promise<Buffer>;
	}
	const XlsxPopulate: {
		fromBlankAsync(): Promise<Workbook>;
		fromDataAsync(data: Buffer | Uint8Array): Promise<Workbook>;
	};
	export default XlsxPopulate;
}
