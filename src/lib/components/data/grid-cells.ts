/** How each cell of the sheet is drawn: what it means to the table, what a finding says of it, what was corrected. */
import { address, type SheetView } from '$lib/assay';
import type { Block, CellCorrection, ColumnMapping, Mapping } from '$lib/schemas/sheet';
import type { Lit } from './lit';
import { seriesOf } from './mapped-series';

export interface Look {
	view: SheetView;
	/** Null on a sheet that the table is not on. */
	mapping: Mapping | null;
	/** Outline as drawn: while an edge is dragged, that of the block to be. */
	block: Block | null;
	lit: Map<string, Lit>;
	/** Cells of the finding that is looked at. */
	marked: ReadonlySet<string>;
	corrected: Map<string, CellCorrection>;
	active: string | null;
}

const VALUES = ['time', 'species', 'value', 'temperature'];

export class CellLooks {
	private readonly series: Map<number, ColumnMapping>;
	private readonly across: boolean;
	private readonly leftOut: Set<number>;
	private readonly lastHeader: number;

	constructor(private readonly look: Look) {
		const { mapping } = look;
		this.across = mapping?.across !== undefined;
		this.series = new Map(mapping ? seriesOf(mapping).map((c) => [c.column, c]) : []);
		this.leftOut = new Set(mapping?.across?.leftOutColumns ?? mapping?.leftOutRows ?? []);
		this.lastHeader = mapping?.headerRows.at(-1) ?? 0;
	}

	/** What a column holds, or nothing where the series are rows. */
	ofColumn(column: number): ColumnMapping | undefined {
		return this.across ? undefined : this.series.get(column);
	}
	/** The same of a row. */
	ofRow(row: number): ColumnMapping | undefined {
		return this.across ? this.series.get(row) : undefined;
	}

	inBlock(row: number): boolean {
		const { block } = this.look;
		return block !== null && row >= block.firstRow && row <= block.lastRow;
	}

	classes(row: number, column: number): string {
		const { view, lit, marked, corrected, active } = this.look;
		const cell = address(row, column);
		const light = lit.get(cell);
		const role = this.series.get(this.across ? row : column)?.role ?? 'ignore';
		let classes = 'cell';
		if (!this.inBlock(row) || this.leftOut.has(this.across ? column : row)) classes += ' aside';
		else if (role === 'ignore') classes += ' unused';
		if (typeof view.cell(row, column)?.[1] === 'number' || this.standsRight(role, row)) classes += ' right';
		if (light) classes += ` ${light.open || light.level === 'note' ? light.level : 'answered'}`;
		if (marked.has(cell)) classes += ' marked';
		if (corrected.has(cell)) classes += ' corrected';
		if (cell === active) classes += ' active';
		return classes;
	}

	/** "< LOQ" and the header over numbers stand where the numbers do. */
	private standsRight(role: string, row: number): boolean {
		return VALUES.includes(role) && (this.inBlock(row) || row === this.lastHeader);
	}

	/** What is read in a cell: as it stands, or as a person corrected it. */
	text(row: number, column: number): string {
		return this.look.corrected.get(address(row, column))?.corrected ?? this.look.view.text(row, column);
	}

	/** For the pointer: what the sheet says under a correction. */
	asReceived(row: number, column: number): string | undefined {
		const one = this.look.corrected.get(address(row, column));
		if (!one) return undefined;
		const by = one.by ? ` (${one.by})` : '';
		return `On the sheet “${this.look.view.text(row, column)}”, read as “${one.corrected}”: ${one.reason}${by}`;
	}
}
