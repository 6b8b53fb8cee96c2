import { describe, expect, it } from 'vitest';
import type { GridSheet } from '$lib/schemas/sheet';
import { hiddenWords } from './hidden-words';

const sheet = (over: Partial<GridSheet> = {}): GridSheet => ({
	name: '50 °C',
	state: 'visible',
	rows: [],
	merges: [],
	hiddenRows: [],
	hiddenColumns: [],
	filter: null,
	lastRow: 30,
	lastColumn: 8,
	...over
});

describe('what a sheet hides', () => {
	it('is said with rows, columns, the sheet itself and an active filter', () => {
		expect(hiddenWords(sheet())).toBeNull();
		expect(
			hiddenWords(
				sheet({ state: 'hidden', hiddenRows: [[7, 9], [12, 12]], hiddenColumns: [[4, 4]], filter: 'A5:H20' })
			)
		).toBe('Hidden in the file, shown here: this sheet; rows 7–9, 12; columns D. A filter is on: A5:H20.');
	});
	it('does not name what lies beyond the sheet', () => {
		expect(hiddenWords(sheet({ hiddenRows: [[31, 1_048_576]] }))).toBeNull();
	});
});
