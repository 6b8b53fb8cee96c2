/** How much of a workbook is read at once: cells with a value, empty formatted elements, characters of text. */
import type { ReadingLimits } from './limits';
import { SheetRefusal } from './refusal';

/** Counts cells and text over all sheets of a workbook. */
export class CellBudget {
	private cells = 0;
	private empty = 0;
	private characters = 0;
	constructor(private readonly limits: ReadingLimits) {}

	cell(sheet: string, text: number): void {
		this.characters += text;
		if (++this.cells > this.limits.cells || this.characters > this.limits.textCharacters)
			throw new SheetRefusal(
				'too-many-cells',
				`The workbook holds more than is read at once (${this.limits.cells.toLocaleString('en')} cells; reached in sheet "${sheet}"). Keep only the sheet with the assay values and upload that.`
			);
	}

	nothing(sheet: string): void {
		if (++this.empty > this.limits.emptyElements)
			throw new SheetRefusal(
				'too-many-cells',
				`Sheet "${sheet}" holds more than ${this.limits.emptyElements.toLocaleString('en')} empty formatted rows or cells. Delete the empty rows and columns beside the data, save, and upload it again.`
			);
	}
}
