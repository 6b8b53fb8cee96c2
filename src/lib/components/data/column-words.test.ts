import { readFileSync } from 'node:fs';
import { strToU8 } from 'fflate';
import { expect, it } from 'vitest';
import { propose, timeForm } from '$lib/assay';
import type { GridWorkbook } from '$lib/schemas/sheet';
import { readBytes } from '$lib/server/sheets/reading/read';
import { columnWords } from './column-words';

function chipOfTime(workbook: GridWorkbook): string {
	const { mapping } = propose(workbook, [{ id: 'A', name: 'HX-14' }]).tables[0];
	const time = mapping.columns.find((c) => c.role === 'time');
	return time ? columnWords(time, timeForm(workbook, mapping)) : '';
}
const csv = (text: string) => readBytes(strToU8(text), 'x.csv');

it('a column of stored durations is labelled by its form, not as lacking a unit', () => {
	const file = 'examples/hx14-run5-55C-open-questions.xlsx';
	expect(chipOfTime(readBytes(readFileSync(file), file))).toBe('elapsed time, h:mm');
});

it.each([
	['Time (h),A (mol/L)\n0,0.5\n1,0.4\n2,0.3\n', 'elapsed time, h'],
	['Time,A (mol/L)\n0,0.5\n0,0.5\n0,0.5\n0:30,0.4\n1:00,0.3\n', 'elapsed time, h:mm'],
	['Time (mm:ss),A (mol/L)\n0:00,0.5\n1:30,0.4\n2:00,0.3\n', 'elapsed time, mm:ss'],
	['Time,A (mol/L)\n0 min,0.5\n30 min,0.4\n1 h,0.3\n', 'elapsed time, unit in the cells'],
	['Time,A (mol/L)\n2026-03-01 09:00,0.5\n2026-03-01 10:00,0.4\n2026-03-01 11:00,0.3\n', 'elapsed time, dates with times'],
	['Time,A (mol/L)\n0,0.5\n1,0.4\n2,0.3\n', 'elapsed time, unit not known']
])('the chip of the time column of %j says %j', (text, words) => {
	expect(chipOfTime(csv(text))).toBe(words);
});
