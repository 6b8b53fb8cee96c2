/** The words of each refusal: what was found, where, what is expected, and one way out. */
import { strToU8, zipSync } from 'fflate';
import { describe, expect, it } from 'vitest';
import { readPaste, SheetRefusal } from './index';
import { LIMITS, type ReadingLimits } from './limits';
import { readBytes } from './read';
import { oneSheet, pack, workbookParts } from './test-workbook';

const words = (read: () => unknown): string => {
	try {
		read();
	} catch (error) {
		if (error instanceof SheetRefusal) return error.message;
		throw error;
	}
	return 'read';
};
const of = (bytes: Uint8Array, limits: Partial<ReadingLimits> = {}) =>
	words(() => readBytes(bytes, 'x.xlsx', { ...LIMITS, ...limits }));
const withPart = (name: string, body: string) => oneSheet([[1]], {}, { parts: { [name]: body } });
const sheet = (body: string) =>
	pack(workbookParts([{ name: 'Run 1', rows: [] }], { parts: { 'xl/worksheets/sheet1.xml': body } }));
const cells = (inner: string) =>
	sheet(`<worksheet><sheetData><row r="7">${inner}</row></sheetData></worksheet>`);
const OLE = new Uint8Array([0xd0, 0xcf, 0x11, 0xe0, 0xa1, 0xb1, 0x1a, 0xe1, 0, 0]);

describe('a refusal', () => {
	const CASES: [what: string, message: string, read: () => string][] = [
		[
			'of an empty file',
			'The file is empty (0 bytes); a workbook or a text table is expected. Save the sheet again in your spreadsheet program and upload it.',
			() => of(new Uint8Array())
		],
		[
			'of blank lines',
			'The file holds no cells; a header row and rows of values are expected. Save the sheet again in your spreadsheet program and upload it.',
			() => of(strToU8('\n\n ,,\n'))
		],
		[
			'of a picture',
			'This is a picture (PNG). A workbook (.xlsx) or a text table (.csv, .tsv, .txt) is expected. Save the sheet as one of these and upload that.',
			() => of(new Uint8Array([0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a, 0, 0]))
		],
		[
			'of an archive without a workbook',
			'This is a zip archive without a workbook. A workbook (.xlsx) or a text table (.csv, .tsv, .txt) is expected. Save the sheet as one of these and upload that.',
			() => of(zipSync({ 'readme.txt': strToU8('nothing') }))
		],
		[
			'of the old format',
			'This is a workbook of the old format (.xls); .xlsx, .csv, .tsv or .txt is expected. Save it as .xlsx and upload that.',
			() => of(OLE)
		],
		[
			'of a binary workbook',
			'This is a binary workbook (.xlsb); .xlsx, .csv, .tsv or .txt is expected. Save it as .xlsx and upload that.',
			() => of(withPart('xl/workbook.bin', 'x'))
		],
		[
			'of macros',
			'The workbook contains macros; a workbook without them is expected, and macros are never run here. Save it as .xlsx and upload that.',
			() => of(withPart('xl/vbaProject.bin', 'x'))
		],
		[
			'of links to other files',
			'The workbook takes values from other files; numbers that stand in the file itself are expected, so that they can be traced. Break the links (paste as values) in your spreadsheet program and upload it again.',
			() => of(withPart('xl/externalLinks/externalLink1.xml', '<externalLink/>'))
		],
		[
			'of too large a file',
			'The file has 0.1 MB; at most 0 MB are read. Keep only the sheet with the assay values and upload that.',
			() => of(new Uint8Array(60_000).fill(49), { fileBytes: 1000 })
		],
		[
			'of too many sheets',
			'The workbook has more than 0 sheets, which are the most that are read. Keep only those with assay values and upload that.',
			() => of(oneSheet([[1]]), { sheets: 0 })
		],
		[
			'of too many merged areas',
			'Sheet "Data" has more than 1 merged areas. Unmerge those beside the data and upload it again.',
			() => of(oneSheet([[1]], { merges: ['A1:B1', 'A2:B2'] }), { merges: 1 })
		],
		[
			'of too wide a text names the line',
			'Line 2 has more than 16 384 columns, the most that a sheet can have. Save the file with another separator, or keep only the columns with assay values, and upload that.',
			() => of(strToU8(`a;b\n${';1'.repeat(17_000)}\n`))
		],
		[
			'of too long a pasted text',
			'The pasted text has 2,000,001 characters; at most 2,000,000 are read. Paste the rows with assay values alone, or save them as a file and upload that.',
			() => words(() => readPaste('1'.repeat(2_000_001)))
		],
		[
			'of a number that is none names its cell',
			'The workbook is damaged: cell B7 of sheet "Run 1" holds "0.5x" where a number is stored. Open it in your spreadsheet program, save it again as .xlsx and upload that copy.',
			() => of(cells('<c r="B7"><v>0.5x</v></c>'))
		],
		[
			'of a shared text that is not there names its cell',
			'The workbook is damaged: cell C7 of sheet "Run 1" names a text that is not there. Open it in your spreadsheet program, save it again as .xlsx and upload that copy.',
			() => of(cells('<c r="C7" t="s"><v>12</v></c>'))
		]
	];
	it.each(CASES)('%s', (_what, message, read) => {
		expect(read()).toBe(message);
	});
});
