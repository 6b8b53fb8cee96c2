import { proposeBlock } from '$lib/assay';
import type { SpeciesContent } from '$lib/schemas/scheme';
import type { Block, ColumnMapping, GridWorkbook, SavedMapping, TableProposal } from '$lib/schemas/sheet';

export interface DrawnPlace {
	key: string;
	sheet: string;
	block: Block;
	headerRows: number[] | null;
}

/** Tables that a person marked on the sheet, each proposed once. */
export class DrawnTables {
	private readonly tables = new Map<string, TableProposal>();

	constructor(
		private readonly workbook: GridWorkbook,
		private readonly species: SpeciesContent[],
		private readonly saved: SavedMapping[]
	) {}

	/** Columns of a block as the reader would propose them; nothing is kept. */
	columnsOf({ key, sheet, block, headerRows }: DrawnPlace): ColumnMapping[] {
		const { workbook, species, saved } = this;
		return proposeBlock(workbook, species, sheet, block, headerRows, key, { saved })?.mapping.columns ?? [];
	}

	propose({ key, sheet, block, headerRows }: DrawnPlace): TableProposal | null {
		const before = this.tables.get(key);
		if (before) return before;
		const { workbook, species, saved } = this;
		const table = proposeBlock(workbook, species, sheet, block, headerRows, key, { saved });
		if (table) this.tables.set(key, table);
		return table;
	}
}
