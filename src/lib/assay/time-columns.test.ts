/** Times in several columns (B17) and times that are written once for several rows (B31): asked, never put together in silence. */
import { describe, expect, it } from 'vitest';
import {
	answer,
	book,
	conditions,
	findingsOf,
	first,
	species,
	times,
	timesOf,
	valuesOf
} from '../server/sheets/reading/test-tables';
import type { TestCell } from '../server/sheets/reading/test-workbook';
import { settle } from './index';

const clock: TestCell[][] = [
	[0, 0, 0.5],
	[0, 15, 0.45],
	[0, 45, 0.4],
	[1, 30, 0.3],
	[4, null, 0.2],
	[26, 5, 0.1]
];

describe('hours and minutes in columns of their own', () => {
	it('B17: are proposed as one time, with an example, and asked', () => {
		const workbook = book([['h', 'min', 'A (mol/L)'], ...clock]);
		expect(first(workbook).mapping.columns.map((c) => [c.role, c.unit])).toEqual([
			['time', 'h'],
			['time', 'min'],
			['species', 'mol/L']
		]);
		const [f] = findingsOf(workbook, 'B17');
		expect([f.level, f.cells.join(), f.message]).toEqual([
			'ask',
			'A1,B1',
			'Times stand in column A (h) and column B (min). One time made of both (1 | 30 = 1.5 h), or is only one of them the time?'
		]);
		const together = answer(workbook, { B17: { key: 'together' } });
		expect(timesOf(together)).toEqual([0, 0.25, 0.75, 1.5, 4, 26.0833333333333]);
		expect(together.run?.timeUnit).toBe('h');
		expect(together.conversions).toContain(
			'Times of column A (h) and column B (min) added up to one time in h (1 | 30 = 1.5 h).'
		);
		expect(timesOf(answer(workbook, { B17: { key: 'use:A' }, B19: { key: 'samples' } }))).toEqual([
			0, 0, 0, 1, 4, 26
		]);
	});

	it('B17: below a merged "Time", with seconds as well, and as two tables side by side', () => {
		const rows = clock.map(([h, min, a]) => [h, min, 30, a]);
		const three = book([['Time', null, null, 'A'], ['h', 'min', 's', 'mol/L'], ...rows], {
			merges: ['A1:C1']
		});
		expect(timesOf(answer(three, { B17: { key: 'together' } }))?.[3]).toBeCloseTo(1.5 + 30 / 3600, 12);
		const beside = book([
			['h', 'min', 'A (mol/L)', null, 'h', 'min', 'A (mol/L)'],
			...clock.map((row) => [...row, null, ...row])
		]);
		expect(first(beside).range).toBe('A2:C7');
		expect(findingsOf(beside, 'B17')).toHaveLength(1);
	});

	it('B17: the same time told twice, in h and in min, is not taken for its parts', () => {
		const workbook = book([
			['Time (h)', 'Time (min)', 'A (mol/L)'],
			...[0, 0.5, 1, 2, 4].map((h, i) => [h, h * 60, 0.5 - i * 0.1])
		]);
		expect(first(workbook).mapping.columns.map((c) => c.role)).toEqual(['time', 'ignore', 'species']);
	});

	it('B18: a time entered for a row is the whole time', () => {
		const rows = clock.map((row) => [...row]);
		rows[3] = [0, 30, 0.3];
		const workbook = book([['h', 'min', 'A (mol/L)'], ...rows]);
		const settled = answer(workbook, {
			B17: { key: 'together' },
			B18: { key: 'enter', values: { value: '1.5' } }
		});
		expect(timesOf(settled)?.[3]).toBe(1.5);
		expect(settled.run?.corrections?.map((c) => [c.cell, c.corrected])).toEqual([
			['A5', '1.5'],
			['B5', '0']
		]);
	});

	it('B17: two columns that a person marks as times in one unit are not added up', () => {
		const workbook = book([['Time (h)', 'Start (h)', 'A (mol/L)'], ...clock]);
		const { mapping } = first(workbook);
		const columns = mapping.columns.map((c) =>
			c.column === 2 ? { ...c, role: 'time' as const, unit: 'h' } : c
		);
		const { findings } = settle({ workbook, species, mapping: { ...mapping, conditions, columns } });
		const asked = findings.find((f) => f.rule === 'B17');
		expect([asked?.open, asked?.options.map((o) => o.key)]).toEqual([true, ['use:A', 'use:B']]);
	});
});

describe('blank times below a filled one', () => {
	const workbook = times([0, 1, null, 2, null, null], 'Time (h)');

	it('B31: raise one question, however many they are', () => {
		const blanks = findingsOf(workbook, 'B31');
		expect(blanks.map((f) => [f.level, f.cells.join(), f.message])).toEqual([
			[
				'ask',
				'A4,A6,A7',
				'Rows 4, 6, 7 have values but no time (A4, A6, A7). Replicates at the time before them, or times of their own?'
			]
		]);
		expect(first(workbook).findings.filter((f) => f.level === 'stop')).toEqual([]);
	});

	it('B31: are filled down as replicates, given times of their own, or left out', () => {
		const filled = answer(workbook, { B31: { key: 'fill-down' }, B19: { key: 'samples' } });
		expect(timesOf(filled)).toEqual([0, 1, 1, 2, 2, 2]);
		expect(filled.conversions).toContain('Rows 4, 6, 7: taken at the time before them.');
		const entered = answer(workbook, { B31: { key: 'enter', values: { A4: '1.5', A6: '3', A7: 4 } } });
		expect(timesOf(entered)).toEqual([0, 1, 1.5, 2, 3, 4]);
		expect(entered.run?.corrections?.map((c) => c.cell)).toEqual(['A4', 'A6', 'A7']);
		expect(timesOf(answer(workbook, { B31: { key: 'leave-out' } }))).toEqual([0, 1, 2]);
	});

	it('B18: a blank above the first time has nothing to stand for it, and stops', () => {
		const [f] = findingsOf(times([null, 1, 2, 3, 4], 'Time (h)'), 'B18');
		expect([f.level, f.message]).toEqual([
			'stop',
			'Row 2 has values but no time in A2. Enter the time, or leave the row out.'
		]);
	});

	it('B27: a remark between the samples, without a time and a value, is noted and not used', () => {
		const rows: TestCell[][] = [
			['Time (h)', 'A (mol/L)', 'Comment', 'No.'],
			[0, 0.5, null, 1],
			[1, 0.4, null, 2],
			[null, null, 'catalyst added', 3],
			[2, 0.3, null, 4]
		];
		expect(findingsOf(book(rows), 'B27').map((f) => [f.level, f.cells.join()])).toEqual([['note', 'A4']]);
		expect(valuesOf(answer(book(rows), {}))).toEqual([0.5, 0.4, 0.3]);
	});
});
