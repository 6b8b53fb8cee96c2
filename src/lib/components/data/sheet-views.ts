import { SheetView } from '$lib/assay';
import type { GridWorkbook } from '$lib/schemas/sheet';

/** The sheets of a workbook, each made ready for reading once. */
export class SheetViews {
	private readonly views = new Map<string, SheetView>();

	constructor(readonly workbook: GridWorkbook) {}

	of(name: string | undefined): SheetView | null {
		const sheet = this.workbook.sheets.find((s) => s.name === name);
		if (!sheet) return null;
		const view = this.views.get(sheet.name) ?? new SheetView(this.workbook, sheet);
		this.views.set(sheet.name, view);
		return view;
	}
}
