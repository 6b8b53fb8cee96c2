import { HyperFormula, type RawCellContent } from 'hyperformula';
import XlsxPopulate from 'xlsx-populate';

/** A workbook as an independent spreadsheet engine calculates it. */
export interface Recalculated {
	value(sheet: string, address: string): unknown;
	set(sheet: string, address: string, value: number): void;
	/** Every formula cell with the value stored beside it. */
	formulas: { sheet: string; address: string; formula: string; stored: unknown }[];
	/** Every text cell. */
	texts: { sheet: string; address: string; text: string }[];
	sheets: string[];
	/** Address of the cell right of the first cell of a sheet that holds the text. */
	beside(sheet: string, label: string, columns?: number): string;
}

interface RawCell {
	formula(): string | undefined;
	value(): unknown;
	address(): string;
	columnNumber(): number;
	rowNumber(): number;
}
interface RawSheet {
	name(): string;
	_rows: ({ _cells: (RawCell | undefined)[] } | undefined)[];
}

const content = (cell: RawCell): RawCellContent => {
	const formula = cell.formula();
	if (formula !== undefined) return `=${formula}`;
	const value = cell.value();
	// An apostrophe tells the engine that what follows is text, as a text cell of the file is.
	if (typeof value === 'string') return `'${value}`;
	return value as RawCellContent;
};

export async function recalculate(bytes: Buffer): Promise<Recalculated> {
	const workbook = await XlsxPopulate.fromDataAsync(bytes);
	const formulas: Recalculated['formulas'] = [];
	const texts: Recalculated['texts'] = [];
	const sheets: Record<string, RawCellContent[][]> = {};
	for (const raw of workbook.sheets() as unknown as RawSheet[]) {
		const rows: RawCellContent[][] = [];
		for (const row of raw._rows)
			for (const cell of row?._cells ?? []) {
				if (!cell) continue;
				(rows[cell.rowNumber() - 1] ??= [])[cell.columnNumber() - 1] = content(cell);
				const formula = cell.formula();
				const at = { sheet: raw.name(), address: cell.address() };
				if (formula !== undefined) formulas.push({ ...at, formula, stored: cell.value() });
				else if (typeof cell.value() === 'string') texts.push({ ...at, text: cell.value() as string });
			}
		sheets[raw.name()] = Array.from(rows, (r) => Array.from(r ?? [], (c) => c ?? null));
	}
	const engine = HyperFormula.buildFromSheets(sheets, { licenseKey: 'gpl-v3' });
	const find = (sheet: string, address: string) => {
		const [, letters, row] = /^([A-Z]+)(\d+)$/.exec(address)!;
		const col = [...letters].reduce((n, c) => n * 26 + c.charCodeAt(0) - 64, 0) - 1;
		return { sheet: engine.getSheetId(sheet)!, row: Number(row) - 1, col };
	};
	return {
		value: (sheet, address) => engine.getCellValue(find(sheet, address)),
		set: (sheet, address, value) => void engine.setCellContents(find(sheet, address), value),
		formulas,
		texts,
		sheets: Object.keys(sheets),
		beside(sheet, label, columns = 1) {
			const found = texts.find((t) => t.sheet === sheet && t.text === label);
			if (!found) throw new Error(`No cell of ${sheet} reads "${label}".`);
			const [, letters, row] = /^([A-Z]+)(\d+)$/.exec(found.address)!;
			return String.fromCharCode(letters.charCodeAt(0) + columns) + row;
		}
	};
}
