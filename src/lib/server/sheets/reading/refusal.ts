/** Why a file was not read. A closed list: everything the reader can throw is one of these. */
export const REFUSAL_CODES = [
	'empty',
	'not-a-sheet',
	'old-format',
	'other-format',
	'encrypted',
	'macro-enabled',
	'external-links',
	'damaged',
	'too-large',
	'too-many-cells',
	'bomb',
	'entity-declaration',
	'path-traversal',
	'timeout',
	'out-of-memory',
	'busy'
] as const;
export type RefusalCode = (typeof REFUSAL_CODES)[number];

/** A file that is refused, in words for the person who uploaded it: what was found, what is expected, one way out. */
export class SheetRefusal extends Error {
	readonly code: RefusalCode;
	constructor(code: RefusalCode, message: string) {
		super(message);
		this.name = 'SheetRefusal';
		this.code = code;
	}
}

/** Something else than a sheet. */
export const notSheet = (what: string): SheetRefusal =>
	new SheetRefusal(
		'not-a-sheet',
		`This is ${what}. A workbook (.xlsx) or a text table (.csv, .tsv, .txt) is expected. Save the sheet as one of these and upload that.`
	);

export const damaged = (what: string): SheetRefusal =>
	new SheetRefusal(
		'damaged',
		`The workbook is damaged: ${what}. Open it in your spreadsheet program, save it again as .xlsx and upload that copy.`
	);
