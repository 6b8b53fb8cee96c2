/** One worksheet part as a stream: cells with a value, and the facts about rows and columns that the reader needs. */
import { address, columnNumber } from '$lib/assay/grid';
import { CELL } from '$lib/schemas/cell-flags';
import type { CellValue, GridCell, GridSheet } from '$lib/schemas/sheet';
import type { CellBudget } from './cell-budget';
import { CELL_TEXT, type ReadingLimits } from './limits';
import type { Package } from './package';
import { RaisedRuns } from './raised';
import { damaged, SheetRefusal } from './refusal';
import { addSpan, columnOf, isOn, isoSerial, whole } from './sheet-attributes';
import type { StyleTable } from './styles';
import { ownText } from './own-text';

export interface SheetSource {
	name: string;
	state: GridSheet['state'];
	part: string;
	date1904: boolean;
}

interface Context {
	strings: string[];
	styles: StyleTable;
	budget: CellBudget;
	limits: ReadingLimits;
}

export function readSheet(pack: Package, source: SheetSource, context: Context): GridSheet {
	const reader = new SheetReader(source, context);
	pack.read(source.part, {
		open: (name, a) => reader.open(name, a),
		text: (text) => reader.text(text),
		close: (name) => reader.close(name)
	});
	return reader.sheet;
}

class SheetReader {
	readonly sheet: GridSheet;
	private row = 0;
	private cells: GridCell[] = [];
	private column = 0;
	private type = 'n';
	private format = 0;
	private formula = false;
	private value = '';
	private inCell = false;
	private collecting = false;
	private readonly runs = new RaisedRuns();
	private phonetic = 0;
	private active = false;

	constructor(
		private readonly source: SheetSource,
		private readonly context: Context
	) {
		this.sheet = {
			name: source.name,
			state: source.state,
			rows: [],
			merges: [],
			hiddenRows: [],
			hiddenColumns: [],
			filter: null,
			lastRow: 0,
			lastColumn: 0
		};
	}

	open(name: string, a: Readonly<Record<string, string>>): void {
		if (this.inCell) this.runs.open(name, a);
		switch (name) {
			case 'c':
				return this.openCell(a);
			case 'v':
				this.collecting = this.inCell;
				return;
			case 't':
				this.collecting = this.inCell && this.phonetic === 0;
				return;
			case 'f':
				this.formula = this.inCell;
				return;
			case 'rPh':
				this.phonetic++;
				return;
			case 'row':
				return this.openRow(a);
			case 'col':
				if (isOn(a.hidden)) addSpan(this.sheet.hiddenColumns, whole(a.min, 16_384), whole(a.max, 16_384));
				return;
			case 'mergeCell':
				return this.merge(a.ref ?? '');
			case 'autoFilter':
				if (a.ref) this.sheet.filter = a.ref.slice(0, 40);
				return;
			case 'filterColumn':
				this.active = true;
				return;
		}
	}

	text(text: string): void {
		if (this.collecting && this.value.length <= CELL_TEXT)
			this.value += this.runs.of(text.slice(0, CELL_TEXT));
	}

	close(name: string): void {
		if (this.inCell) this.runs.close(name);
		switch (name) {
			case 'c':
				return this.closeCell();
			case 'v':
			case 't':
				this.collecting = false;
				return;
			case 'rPh':
				this.phonetic = Math.max(0, this.phonetic - 1);
				return;
			case 'row':
				return this.closeRow();
			case 'worksheet':
				if (!this.active) this.sheet.filter = null;
				this.sheet.rows.sort((x, y) => x.r - y.r);
				return;
		}
	}

	private openRow(a: Readonly<Record<string, string>>): void {
		this.row = a.r === undefined ? this.row + 1 : whole(a.r, 1_048_576);
		this.column = 0;
		this.cells = [];
		if (isOn(a.hidden)) addSpan(this.sheet.hiddenRows, this.row, this.row);
	}

	private closeRow(): void {
		if (this.cells.length === 0) return this.context.budget.nothing(this.source.name);
		const last = this.sheet.rows.at(-1);
		if (last && last.r === this.row)
			throw damaged(`row ${this.row} of sheet "${this.source.name}" is there twice`);
		this.cells.sort((x, y) => x[0] - y[0]);
		this.sheet.rows.push({ r: this.row, c: this.cells });
		this.sheet.lastRow = Math.max(this.sheet.lastRow, this.row);
		this.sheet.lastColumn = Math.max(this.sheet.lastColumn, this.cells[this.cells.length - 1][0]);
	}

	private openCell(a: Readonly<Record<string, string>>): void {
		this.column = a.r === undefined ? this.column + 1 : columnOf(a.r);
		if (this.column < 1 || this.column > 16_384)
			throw damaged(`a cell in row ${this.row} of sheet "${this.source.name}" lies outside the sheet`);
		this.type = a.t ?? 'n';
		this.format = Number(a.s ?? 0) || 0;
		this.formula = false;
		this.value = '';
		this.inCell = true;
		this.phonetic = 0;
	}

	private closeCell(): void {
		this.inCell = false;
		const { value, flags, style } = this.reading();
		if (value === null && flags === 0) return this.context.budget.nothing(this.source.name);
		this.context.budget.cell(this.source.name, typeof value === 'string' ? value.length : 0);
		const at = style;
		if (flags !== 0) this.cells.push([this.column, value, at, flags]);
		else if (at !== 0) this.cells.push([this.column, value, at]);
		else this.cells.push([this.column, value]);
	}

	private reading(): { value: CellValue; flags: number; style: number } {
		const { styles, strings } = this.context;
		let style = styles.index[this.format] ?? 0;
		let flags = this.formula ? CELL.formula : 0;
		if (styles.quoted.has(this.format)) flags |= CELL.quoted;
		let value: CellValue;
		if (this.type === 's') value = this.shared(strings);
		else if (this.type === 'str' || this.type === 'inlineStr')
			value = ownText(this.value.slice(0, CELL_TEXT));
		else if (this.value === '') value = null;
		else if (this.type === 'b') value = this.value.trim() === '1' || this.value.trim() === 'true';
		else if (this.type === 'e') {
			value = this.value.slice(0, 40);
			flags |= CELL.error;
		} else if (this.type === 'd') {
			const serial = isoSerial(this.value, this.source.date1904);
			value = serial ?? this.value.slice(0, CELL_TEXT);
			if (serial !== null && styles.styles[style].kind === 'general')
				style = styles.withFormat('yyyy-mm-dd h:mm');
		} else value = this.number();
		if (value === '' && !this.formula) value = null;
		if (value === null && this.formula) flags |= CELL.uncomputed;
		if (value === null && !this.formula) flags = 0;
		return { value, flags, style };
	}

	private shared(strings: string[]): string | null {
		if (this.value === '') return null;
		const at = Number(this.value);
		if (!Number.isInteger(at) || at < 0 || at >= strings.length)
			throw damaged(`${this.here()} names a text that is not there`);
		return strings[at];
	}

	private number(): number {
		const value = Number(this.value);
		if (!Number.isFinite(value) || this.value.trim() === '')
			throw damaged(`${this.here()} holds "${this.value.slice(0, 40)}" where a number is stored`);
		return value;
	}

	/** "cell B7 of sheet "Run 1"". */
	private here(): string {
		return `cell ${address(this.row, this.column)} of sheet "${this.source.name}"`;
	}

	private merge(ref: string): void {
		const match = /^([A-Z]{1,3})(\d{1,7}):([A-Z]{1,3})(\d{1,7})$/.exec(ref);
		if (!match) return;
		if (this.sheet.merges.length >= this.context.limits.merges)
			throw new SheetRefusal(
				'too-many-cells',
				`Sheet "${this.source.name}" has more than ${this.context.limits.merges.toLocaleString('en')} merged areas. Unmerge those beside the data and upload it again.`
			);
		this.sheet.merges.push([
			Number(match[2]),
			columnNumber(match[1]),
			Number(match[4]),
			columnNumber(match[3])
		]);
	}
}
