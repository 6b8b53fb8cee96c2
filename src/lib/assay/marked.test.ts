/** Numbers and times that carry a mark (B11, B18): asked with a suggested reading, never read or weighed in silence. */
import { describe, expect, it } from 'vitest';
import {
	answer,
	book,
	changed,
	csv,
	findingsOf,
	first,
	times,
	timesOf,
	valuesOf
} from '../server/sheets/reading/test-tables';
import { readValueText } from './cells';
import { readMark } from './marks';

describe('a mark on a number', () => {
	it.each([
		['~0.2', 'about', '0.2'],
		['ca. 0.2', 'about', '0.2'],
		['≈ 0,2', 'about', '0,2'],
		['approx. 12', 'about', '12'],
		['0.50 ± 0.01', 'spread', '0.50'],
		['0.50 +/- 0.01', 'spread', '0.50'],
		['0,50±2 %', 'spread', '0,50'],
		['0.50 (0.01)', 'spread', '0.50'],
		['0.512(3)', 'spread', '0.512'],
		['0.50 (SD 0.01)', 'spread', '0.50'],
		['0.5a', 'note', '0.5'],
		['0.52*', 'note', '0.52'],
		['*0.52', 'note', '0.52'],
		['0.52 †', 'note', '0.52'],
		['0.52²', 'note', '0.52'],
		['0.52 a,b', 'note', '0.52'],
		['0.52 (manual)', 'note', '0.52'],
		['0.52?', 'note', '0.52'],
		['(0.52)', 'brackets', '0.52']
	])('%s is parted into %s and the number', (text, kind, core) => {
		expect(readMark(text)).toMatchObject({ kind, core });
		expect(readValueText(text, core.includes(',') ? ',' : '.')).toMatchObject({ kind: 'marked' });
	});

	it.each([
		['0.5 mol/L', 'with unit'],
		['0.5 h', 'with unit'],
		['5 %', 'number'],
		['-0.2', 'number'],
		['1.2e-3', 'number'],
		['1.2.2026', 'date'],
		['RRT 0.87', 'text'],
		['see 2a', 'text'],
		['n.d.', 'not']
	])('%s carries none', (text, kind) => {
		expect(readValueText(text, '.').kind).toBe(kind);
	});

	it('stands on limits too', () => {
		expect(readValueText('<0.02*', '.')).toMatchObject({
			kind: 'marked',
			inner: { kind: 'below', limit: 0.02 }
		});
	});
});

describe('marked values of a table', () => {
	it('B11: one question for each kind of mark, with the cells and the suggested reading', () => {
		const workbook = book(
			changed({ '1,1': '~0.4', '2,1': '0.30 ± 0.01', '3,1': '0.20 ± 0.02', '1,2': '0.1*', '4,1': '(0.1)' })
		);
		expect(findingsOf(workbook, 'B11').map((f) => [f.level, f.cells.join(), f.message])).toEqual([
			['ask', 'B3', '"~0.4" in B3: an approximate value. Read 0.4, or leave it as missing?'],
			[
				'ask',
				'B4,B5',
				'"0.30 ± 0.01" in B4, B5: a value with its spread. The spread goes on the record and is not used as a weight. Read 0.30, or leave them as missing?'
			],
			[
				'ask',
				'B6',
				'"(0.1)" in B6: a value in brackets, as doubtful or negative values are written. Read 0.1, or leave it as missing?'
			],
			['ask', 'C3', '"0.1*" in C3: a value with the mark "*". Read 0.1, or leave it as missing?']
		]);
		const read = answer(workbook, { B11: { key: 'number' } });
		expect(valuesOf(read)).toEqual([0.5, 0.4, 0.3, 0.2, 0.1, 0.05]);
		expect(read.conversions).toContain(
			'B4, B5: "0.30 ± 0.01" read as 0.30; its spread stands on the record and was not used as a weight.'
		);
		expect(valuesOf(answer(workbook, { B11: { key: 'missing' } }))?.slice(0, 5)).toEqual([
			0.5,
			null,
			null,
			null,
			null
		]);
	});

	it('B11: a single one can be entered anew, as a correction', () => {
		const settled = answer(book(changed({ '1,1': '~0.4' })), {
			B11: { key: 'enter', values: { value: '0.41' } }
		});
		expect(valuesOf(settled)?.[1]).toBe(0.41);
		expect(settled.run?.corrections).toMatchObject([{ cell: 'B3', original: '~0.4', corrected: '0.41' }]);
	});

	it('a sheet full of them is still found, with its decimal sign', () => {
		const table = first(
			csv('Zeit (h);A (mol/L);B (mol/L)\n0;0,50 ± 0,01;n.d.\n1;0,40 ± 0,01;~0,10\n2;0,31 ± 0,01;0,20*\n')
		);
		expect([table.range, table.mapping.decimal]).toEqual(['A2:C4', ',']);
		expect(table.mapping.columns.map((c) => c.role)).toEqual(['time', 'species', 'species']);
		expect(table.findings.filter((f) => f.rule === 'B11')).toHaveLength(3);
	});

	it('compounds named "1a" and "1b" in a header are names, not values', () => {
		const table = first(
			book([
				['Time (h)', '1a', '1b', '2a'],
				[0, 0.5, 0, 0],
				[1, 0.4, 0.1, 0],
				['Time (h)', '1a', '1b', '2a'],
				[0, 0.4, 0, 0],
				[1, 0.3, 0.1, 0]
			])
		);
		expect([table.range, table.columns.map((c) => c.header)]).toEqual([
			'A2:D3',
			['Time (h)', '1a', '1b', '2a']
		]);
	});
});

describe('marked times', () => {
	it('B18: are asked once, and read without the mark or left out', () => {
		const workbook = times([0, '~1', 2, '3*', 4, 5], 'Time (h)');
		expect(findingsOf(workbook, 'B18').map((f) => [f.level, f.cells.join(), f.message])).toEqual([
			['ask', 'A3,A5', '"~1" in A3, A5: a time with a mark. Read 1?']
		]);
		const read = answer(workbook, { B18: { key: 'number' } });
		expect([timesOf(read), read.run?.corrections]).toEqual([[0, 1, 2, 3, 4, 5], undefined]);
		expect(timesOf(answer(workbook, { B18: { key: 'leave-out' } }))).toEqual([0, 2, 4, 5]);
	});
});
