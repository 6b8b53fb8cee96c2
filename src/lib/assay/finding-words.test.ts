/** Every finding says what was found, what is expected, and offers a way on: looked through on sheets that raise many at once. */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { readBytes } from '../server/sheets/reading/read';
import { book, csv, species } from '../server/sheets/reading/test-tables';
import type { GridWorkbook } from '../schemas/sheet';
import { propose } from './index';

const day = (h: number, format = 'h:mm') => ({ v: h / 24, format });
const SHEETS: [string, () => GridWorkbook][] = [
	['the messy workbook', () => readBytes(readFileSync('tests/fixtures/s02_messy.xlsx'), 's02_messy.xlsx')],
	['no table', () => book([['Minutes of the meeting']])],
	[
		'texts, limits, errors and dates among the values',
		() =>
			book([
				['Time (h)', 'A (mol/L)', 'B (mol/L)', 'X', 'Y'],
				[0, '0.5 mol/L', '40 g/L', 1, 1],
				[1, '<LOQ', 'n.d.', 1, 1],
				[2, 'tr', '>2', 1, 1],
				[3, { error: '#N/A' }, { f: 'B2' }, 1, 1],
				[4, { v: 46_000, format: 'dd.mm.yyyy' }, -0.1, 1, 1],
				[5, '~0.2', 'see notebook', 1, 1],
				[3.5, '0.2 ± 0.1', { v: 0.4, format: '0%' }, 1, 1],
				[6, '0,25', '-', 1, 1],
				['soon', { v: 0.1, fill: true }, 0, 1, 1]
			])
	],
	[
		'times of several kinds, hidden rows and columns',
		() =>
			book(
				[
					['Time', 'A', 'B', 'T'],
					[day(9), 0.5, 0, 50],
					[day(23), 0.4, 0, 50],
					[day(1), 0.4, 0, 50],
					[2, 0.3, 0, 50],
					[null, 0.3, 0, 50],
					['~3', 0.2, 0, 65]
				],
				{ hiddenRows: [3], hiddenColumns: [3] }
			)
	],
	[
		'stamps over a clock change',
		() => csv('Timestamp;A (mol/L)\n2026-10-24 23:00;0,5\n2026-10-25 05:00;0,4\n')
	],
	['area % that do not add up', () => csv('Time (h),A (area %),B (area %)\n0,90,0\n1,60,30\n2,30,55\n')],
	['times across', () => csv('Time (h),0,1,2\nA (mol/L),0.5,0.4,0.3\n')],
	['replicates', () => csv('Time (h),A rep 1,A rep 2\n1,0.5,0.4\n1,0.4,0.3\n2,0.4,0.3\n')],
	['commas in two roles', () => csv('Time (h),A (mol/L)\n0,0,5\n1,0,4\n2,0,3\n')]
];

describe.each(SHEETS)('findings on %s', (_what, make) => {
	const { findings, tables } = propose(make(), species);
	const all = [...findings, ...tables.flatMap((t) => t.findings)];

	it('say what was found and what is expected', () => {
		expect(all.length).toBeGreaterThan(0);
		for (const f of all) {
			expect([f.id, f.found.length > 0, f.expected.length > 0]).toEqual([f.id, true, true]);
			expect([f.id, f.message]).toEqual([f.id, expect.stringMatching(/^["“A-Z\d<>~−-].*[.?]["”)]?$/su)]);
			expect(`${f.found} ${f.expected} ${f.message}`).not.toMatch(/undefined|null|NaN|\[object/);
		}
	});

	it('that wait for an answer offer one, or say what to do', () => {
		for (const f of all.filter((f) => f.open)) {
			const way = f.options.length > 0 || /\b(Choose|Correct|Mark|Save|Say)\b/.test(f.message);
			expect([f.id, way]).toEqual([f.id, true]);
			for (const field of f.options.flatMap((o) => o.needsValue ?? []))
				expect([f.id, field.label.length > 0]).toEqual([f.id, true]);
		}
	});

	it('point at cells, and have ids of their own', () => {
		for (const f of all.filter((f) => f.rule !== 'B37' && f.id !== 'B1:workbook' && f.id !== 'B29:workbook'))
			expect([f.id, f.cells.every((c) => /^[A-Z]{1,3}\d+$/.test(c)) && f.cells.length > 0]).toEqual([
				f.id,
				true
			]);
		for (const table of tables)
			expect(new Set(table.findings.map((f) => f.id)).size).toBe(table.findings.length);
	});
});
