/**
 * Text from people on its way into a workbook.
 *
 * A spreadsheet must never take a name or a note for a formula. Text is stored as text (a shared string, never a formula
 * cell); what begins like a formula also gets the number format "@", so that it stays text when somebody edits the cell.
 */

/** Longest text that a cell holds. */
const CELL_TEXT = 32_767;
// eslint-disable-next-line no-control-regex -- finding control characters is the purpose
const CONTROL = /[\u0000-\u0008\u000B\u000C\u000E-\u001F\u007F\uFFFE\uFFFF]/g;
const LONE_SURROGATE = /[\uD800-\uDBFF](?![\uDC00-\uDFFF])|(?<![\uD800-\uDBFF])[\uDC00-\uDFFF]/g;
/** Spreadsheets read _x000D_ as a character code: the underscore is written as one instead. */
const ESCAPE = /_(?=x[0-9A-Fa-f]{4}_)/g;

/** Without what a workbook cannot hold: control characters, half characters, more than a cell's length. */
export function cellText(text: string): string {
	const clean = text.replace(CONTROL, '').replace(LONE_SURROGATE, '\uFFFD').replace(ESCAPE, '_x005F_');
	return clean.length <= CELL_TEXT ? clean : `${clean.slice(0, CELL_TEXT - 1)}…`;
}

/** Whether a spreadsheet might take the text for a formula or a command. */
export const looksLikeFormula = (text: string): boolean => /^[=+\-@\t\r\n]/.test(text);
