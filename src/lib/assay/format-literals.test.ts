/** Number formats that write a unit, a limit or a word beside the stored number: what a person saw on the sheet counts. */
import { describe, expect, it } from 'vitest';
import { answer, book, findingsOf, first, timesOf, valuesOf } from '../server/sheets/reading/test-tables';
import { textAround } from './format-literals';

const T = [0, 1, 2, 4, 8];
const A = [500, 400, 300, 200, 100];
const shownAs = (format: string, head = 'A (mol/L)', values = A) =>
	book([['Time (h)', head], ...T.map((t, i) => [t, { v: values[i], format }])]);

describe('the text that a format makes of a number (ECMA-376-1, 18.8.31)', () => {
	it.each([
		['0.0 "mM"', 300, '300 mM'],
		['General" mM"', 300, '300 mM'],
		['0\\ \\m\\M', 300, '300 mM'],
		['"<"0.0', 2, '<2'],
		['[<0.15]"<LOQ";0.00', 0.1, '<LOQ'],
		['0.00;-0.00;"n.d."', 0, 'n.d.'],
		['0.0;"neg. "0.0', -3, 'neg. -3']
	])('of "%s" for %d is "%s"', (code, value, text) => {
		expect(textAround(code, value)).toBe(text);
	});

	it.each([
		['General', 3],
		['0.00E+00', 3e-9],
		['#,##0.00;[Red]-#,##0.00', -3],
		['[<0.15]"<LOQ";0.00', 0.2],
		['_-* #,##0.00\\ _€_-;-* #,##0.00\\ _€_-;_-* "-"??\\ _€_-;_-@_-', 0],
		['[$-407]0.00', 3],
		['(0.0)', 3]
	])('of "%s" for %d is the number alone', (code, value) => {
		expect(textAround(code, value)).toBeNull();
	});
});

describe('B5: a unit that the number format writes', () => {
	it('is asked about where it is not that of the column, and converted on that word', () => {
		const workbook = shownAs('0.0 "mM"');
		expect(findingsOf(workbook, 'B5')[0]).toMatchObject({ open: true, found: '"500 mM"' });
		expect(valuesOf(answer(workbook, { B5: { key: 'convert' } }))).toEqual([0.5, 0.4, 0.3, 0.2, 0.1]);
	});

	it('is asked about in a single cell', () => {
		const workbook = book([
			['Time (h)', 'A (mol/L)'],
			...T.map((t, i) => [t, i === 2 ? { v: 300, format: '0 "mM"' } : A[i] / 1000])
		]);
		expect(findingsOf(workbook, 'B5').map((f) => f.cells)).toEqual([['B4']]);
	});

	it("raises no question where it is the column's own, and the charge is still offered", () => {
		const workbook = shownAs('0.0 "mM"', 'A (mmol/L)');
		expect(first(workbook).findings.filter((f) => f.open)).toEqual([]);
		expect(first(workbook).suggested.initial?.A).toMatchObject({ value: 500, unit: 'mmol/L' });
		expect(valuesOf(answer(workbook, {}))?.[0]).toBe(0.5);
	});

	it('B21: percent written by the format in a column in mol/L is stopped', () => {
		expect(findingsOf(shownAs('0.0"%"'), 'B21')[0]).toMatchObject({ level: 'stop', open: true });
	});
});

describe('limits and words that the number format writes', () => {
	it('B8: "<0.1" by format is a limit, "<LOQ" is asked about', () => {
		const stated = book([
			['Time (h)', 'A (mol/L)'],
			...T.map((t, i) => [t, i === 4 ? { v: 0.1, format: '"<"0.0' } : A[i] / 1000])
		]);
		expect(valuesOf(answer(stated, {}))?.[4]).toEqual({ below: 0.1 });
		const bare = shownAs('[<150]"<LOQ";0', 'A (mmol/L)');
		expect(findingsOf(bare, 'B8').map((f) => f.cells)).toEqual([['B6']]);
	});

	it('B9: a zero shown as n.d. is asked about', () => {
		const workbook = shownAs('0;-0;"n.d."', 'B (mmol/L)', [0, 100, 200, 300, 400]);
		expect(findingsOf(workbook, 'B9').map((f) => f.cells)).toEqual([['B2']]);
	});
});

describe('B17: a time unit that the number format writes', () => {
	const timed = (head: string) =>
		book([[head, 'A (mmol/L)'], ...T.map((t, i) => [{ v: t * 60, format: '0 "min"' }, A[i]])]);

	it('is asked about below another unit, and converted on that word', () => {
		expect(findingsOf(timed('Time (h)'), 'B17')[0]).toMatchObject({ open: true });
		expect(timesOf(answer(timed('Time (h)'), { B17: { key: 'convert' } }))).toEqual(T);
	});

	it('is the unit of a column whose header has none', () => {
		const settled = answer(timed('Time'), {});
		expect([settled.run?.timeUnit, timesOf(settled)]).toEqual(['min', T.map((t) => t * 60)]);
	});
});
