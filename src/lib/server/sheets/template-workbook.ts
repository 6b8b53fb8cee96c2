import XlsxPopulate from 'xlsx-populate';
import { templateSheets } from '$lib/assay/template';
import type { SpeciesContent } from '$lib/schemas/scheme';

/** The template for a scheme as an .xlsx file. Text that begins with = stays text. */
export async function templateWorkbook(species: SpeciesContent[], title?: string): Promise<Uint8Array> {
	const workbook = await XlsxPopulate.fromBlankAsync();
	const sheets = templateSheets(species, title);
	sheets.forEach(({ name, rows, headRows, columnWidth }, i) => {
		const sheet = i === 0 ? workbook.sheet(0).name(name) : workbook.addSheet(name);
		const width = Math.max(...rows.map((row) => row.length));
		for (let c = 1; c <= width; c++) sheet.column(c).width(columnWidth);
		rows.forEach((row, r) =>
			row.forEach((value, c) => {
				if (value !== null) sheet.cell(r + 1, c + 1).value(value);
			})
		);
		for (const r of headRows)
			for (let c = 1; c <= width; c++) sheet.cell(r, c).style({ bold: true, bottomBorder: 'thin' });
		if (headRows.length > 0) sheet.freezePanes(1, headRows[headRows.length - 1]);
	});
	return new Uint8Array(await workbook.outputAsync());
}
