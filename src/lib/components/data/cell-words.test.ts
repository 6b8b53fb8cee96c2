import { describe, expect, it } from 'vitest';
import { SheetView } from '$lib/assay';
import type { GridWorkbook } from '$lib/schemas/sheet';
import { hiddenText, originalText, storedText } from './cell-words';

const workbook: GridWorkbook = {
	fileName: 'run.xlsx',
	kind: 'xlsx',
	dateSystem: 1900,
	styles: [
		{ format: 'General', kind: 'general' },
		{ format: 'h:mm', kind: 'time' }
	],
	sheets: [
		{
			name: 'run',
			state: 'visible',
			rows: [{ r: 2, c: [[1, 25 / 24, 1], [2, 401.5], [3, 'n.d.']] }],
			merges: [],
			hiddenRows: [[2, 2]],
			hiddenColumns: [[3, 4]],
			filter: null,
			lastRow: 2,
			lastColumn: 3
		}
	]
};
const view = new SheetView(workbook, workbook.sheets[0]);

describe('the line under the sheet', () => {
	it('says what the file holds where the display says less: 25 h under h:mm', () => {
		expect(originalText(view, 'A2')).toBe('1:00');
		expect(storedText(view, 'A2')).toBe(String(25 / 24));
	});
	it('says a plain number or a text once', () => {
		expect([originalText(view, 'B2'), storedText(view, 'B2')]).toEqual(['401.5', '']);
		expect([originalText(view, 'C2'), storedText(view, 'C2')]).toEqual(['n.d.', '']);
	});
	it('names what the file hides, and nothing for a cell that is none', () => {
		expect(hiddenText(view, 'B2')).toBe('row hidden in the file');
		expect(hiddenText(view, 'C2')).toBe('row and column hidden in the file');
		expect(hiddenText(view, 'B9')).toBe('');
		expect(originalText(view, 'no cell')).toBe('');
	});
});
