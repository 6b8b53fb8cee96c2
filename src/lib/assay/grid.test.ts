import { describe, expect, it } from 'vitest';
import type { GridWorkbook } from '../schemas/sheet';
import { address, columnLetter, columnNumber, parseAddress } from './grid';
import { propose, proposeBlock, settle } from './index';
import { builtInFormat, calendarToSerial, formatKind, formatNumber, serialToCalendar } from './number-format';

describe('addresses', () => {
	it('count columns from A to XFD', () => {
		expect([1, 26, 27, 702, 703, 16_384].map(columnLetter)).toEqual(['A', 'Z', 'AA', 'ZZ', 'AAA', 'XFD']);
		for (const n of [1, 26, 27, 702, 703, 16_384]) expect(columnNumber(columnLetter(n))).toBe(n);
		expect(address(14, 1)).toBe('A14');
		expect(parseAddress('$B$7')).toEqual({ row: 7, column: 2 });
		for (const text of ['', 'A', '7', 'A0', 'XFE1', 'A1048577', 'A1:B2'])
			expect(parseAddress(text)).toBeNull();
	});
});

describe('number formats', () => {
	it.each([
		['General', 'general'],
		['0.00', 'number'],
		['0.0%', 'percent'],
		['[h]:mm:ss', 'duration'],
		['h:mm AM/PM', 'time'],
		['dd.mm.yyyy', 'date'],
		['[$-407]d. mmm yyyy hh:mm', 'datetime'],
		['0.00E+00', 'scientific'],
		['# ?/?', 'fraction'],
		['@', 'text'],
		['[Red]0.0;[Blue]-0.0', 'number'],
		['0.0 "h"', 'number'],
		['0.00" mmol/L"', 'number'],
		['mm:ss', 'time'],
		['\\d0', 'number']
	])('%s is %s', (code, kind) => {
		expect(formatKind(code)).toBe(kind);
	});

	it('shows what a person saw', () => {
		const show = (value: number, code: string) => formatNumber(value, code, formatKind(code), 1900);
		expect([
			show(25 / 24, 'h:mm'),
			show(25 / 24, '[h]:mm'),
			show(0.5 / 24, 'mm:ss'),
			show(46054.5, 'dd.mm.yyyy hh:mm'),
			show(0.999999999, 'hh:mm'),
			show(0.043, '0.0%'),
			show(-1.005, '0.00'),
			show(0.1 + 0.2, 'General')
		]).toEqual(['1:00', '25:00', '30:00', '01.02.2026 12:00', '00:00', '4.3%', '-1.00', '0.3']);
		expect(builtInFormat(20)).toBe('h:mm');
	});

	it('reads serial days of both systems (ECMA-376-1, 18.17.4)', () => {
		expect(serialToCalendar(1, 1900)).toMatchObject({ year: 1900, month: 1, day: 1 });
		expect(serialToCalendar(61, 1900)).toMatchObject({ year: 1900, month: 3, day: 1 });
		expect(serialToCalendar(0, 1904)).toMatchObject({ year: 1904, month: 1, day: 1 });
		expect(calendarToSerial({ year: 2026, month: 2, day: 1, hour: 0, minute: 0, second: 0 }, 1900)).toBe(
			46054
		);
	});
});

describe('a grid with cells at its far corner', () => {
	const workbook: GridWorkbook = {
		fileName: 'x.xlsx',
		kind: 'xlsx',
		dateSystem: 1900,
		styles: [{ format: 'General', kind: 'general' }],
		sheets: [
			{
				name: 'S',
				state: 'visible',
				rows: [
					{
						r: 1,
						c: [
							[1, 'Time (h)'],
							[2, 'A (mol/L)'],
							[16_384, 'far']
						]
					},
					...[0, 1, 2, 3, 4].map((t) => ({
						r: t + 2,
						c: [
							[1, t],
							[2, 0.5 - t / 10],
							[16_384, 1]
						] as [number, number][]
					})),
					{ r: 1_048_576, c: [[16_384, 1]] }
				],
				merges: [],
				hiddenRows: [[100, 1_048_576]],
				hiddenColumns: [],
				filter: null,
				lastRow: 1_048_576,
				lastColumn: 16_384
			}
		]
	};
	const species = [{ id: 'A', name: '' }];

	it('is proposed and settled without walking the blank cells', () => {
		const [table] = propose(workbook, species).tables;
		expect(table.block).toMatchObject({ firstRow: 2, lastRow: 6, firstColumn: 1, lastColumn: 400 });
		const whole = { firstRow: 2, lastRow: 1_048_576, firstColumn: 1, lastColumn: 16_384 };
		expect(proposeBlock(workbook, species, 'S', whole)?.columns).toHaveLength(400);
		const { preview } = settle({ workbook, species, mapping: { ...table.mapping, block: whole } });
		expect(preview).toHaveLength(5);
	});

	it('has no answer for a sheet that is not there', () => {
		expect(
			proposeBlock(workbook, species, 'T', { firstRow: 1, lastRow: 2, firstColumn: 1, lastColumn: 2 })
		).toBeNull();
		const [table] = propose(workbook, species).tables;
		expect(settle({ workbook, species, mapping: { ...table.mapping, sheet: 'T' } }).run).toBeNull();
	});
});
