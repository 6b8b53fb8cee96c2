import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { strToU8 } from 'fflate';
import { displayText, SheetView } from '$lib/assay/grid';
import { CELL, gridWorkbookSchema, type GridWorkbook } from '$lib/schemas/sheet';
import { readPaste, readWorkbook } from './index';
import { plainFileName, readBytes } from './read';
import { oneSheet, pack, workbookBytes, workbookParts } from './test-workbook';

const texts = (workbook: GridWorkbook, sheet = 0) =>
	workbook.sheets[sheet].rows.map((row) => row.c.map((cell) => displayText(workbook, cell)));
const fixture = (name: string) =>
	new Uint8Array(readFileSync(new URL(`../../../../../tests/fixtures/${name}`, import.meta.url)));

describe('workbooks', () => {
	it('reads the messy fixture in a worker as plain data that fits its schema', async () => {
		const bytes = fixture('s02_messy.xlsx');
		const before = bytes.slice();
		const workbook = await readWorkbook(bytes, 's02_messy.xlsx');
		expect(gridWorkbookSchema.parse(workbook)).toEqual(workbook);
		expect(workbook.sheets.map((s) => [s.name, s.state])).toEqual([
			['Notes', 'visible'],
			['50°C', 'visible'],
			['calc', 'hidden']
		]);
		const view = new SheetView(workbook, workbook.sheets[1]);
		expect(
			['A7', 'A19', 'B7', 'F20', 'E7', 'E22'].map((a) => view.text(Number(a.slice(1)), a.charCodeAt(0) - 64))
		).toEqual(['0:15', '1:00', '81%', '01.02.2026', '401,0', '#DIV/0!']);
		expect(view.sheet.merges).toContainEqual([4, 2, 4, 4]);
		expect(bytes).toEqual(before);
	});

	it('keeps stored numbers exactly, whatever their format shows', () => {
		const workbook = readBytes(
			oneSheet([
				[
					{ v: 1.0416666666666667, format: 'h:mm' },
					{ v: 1.0416666666666667, format: '[h]:mm' },
					{ v: 0.4312, format: '0%' },
					{ v: 46054, format: 'dd\\.mm\\.yyyy' },
					{ v: 1234.5, format: '#,##0.00' },
					{ v: 0.00012, format: '0.00E+00' },
					{ v: 0.5, format: 'hh:mm:ss' },
					{ v: 12, format: '"n = "0' }
				]
			]),
			'a.xlsx'
		);
		expect(workbook.sheets[0].rows[0].c.map((c) => c[1])).toEqual([
			1.0416666666666667, 1.0416666666666667, 0.4312, 46054, 1234.5, 0.00012, 0.5, 12
		]);
		expect(texts(workbook)[0].slice(0, 7)).toEqual([
			'1:00',
			'25:00',
			'43%',
			'01.02.2026',
			'1,234.50',
			'1.20E-4',
			'12:00:00'
		]);
		expect(workbook.sheets[0].rows[0].c.map((c) => workbook.styles[c[2] ?? 0].kind)).toEqual([
			'time',
			'duration',
			'percent',
			'date',
			'number',
			'scientific',
			'time',
			'number'
		]);
	});

	it('reads shared, inline and rich texts, booleans, errors, ISO dates and formulas with and without a stored result', () => {
		const bytes = workbookBytes([
			{
				rows: [
					[
						'plain',
						{ rich: ['a', 'b'] },
						true,
						{ error: '#N/A' },
						{ f: 'A1+1', v: 3 },
						{ f: 'A1+1' },
						{ f: '"x"', v: 'x' },
						{ iso: '2026-02-01' }
					]
				]
			}
		]);
		const workbook = readBytes(bytes, 'a.xlsx');
		const cells = workbook.sheets[0].rows[0].c;
		expect(cells.map((c) => c[1])).toEqual(['plain', 'ab', true, '#N/A', 3, null, 'x', 46054]);
		expect(cells.map((c) => c[3] ?? 0)).toEqual([
			0,
			0,
			0,
			CELL.error,
			CELL.formula,
			CELL.formula | CELL.uncomputed,
			CELL.formula,
			0
		]);
		const shared = workbookParts([{ rows: [[1]] }], {
			parts: {
				'xl/worksheets/sheet1.xml':
					'<worksheet><sheetData><row><c t="s"><v>1</v></c><c t="s"><v>0</v></c></row></sheetData></worksheet>',
				'xl/sharedStrings.xml':
					'<sst><si><t>one</t></si><si><r><t>t</t></r><r><t>wo</t></r><rPh><t>PHON</t></rPh></si></sst>'
			}
		});
		const rels = String(shared['xl/_rels/workbook.xml.rels']).replace(
			'</Relationships>',
			'<Relationship Id="x" Type="a/sharedStrings" Target="/xl/sharedStrings.xml"/></Relationships>'
		);
		expect(texts(readBytes(pack({ ...shared, 'xl/_rels/workbook.xml.rels': rels }), 'a.xlsx'))).toEqual([
			['two', 'one']
		]);
	});

	it('reads the 1904 date system, hidden rows, columns and sheets, filters, fills and strike-through', () => {
		const workbook = readBytes(
			workbookBytes(
				[
					{
						name: 'Data',
						rows: [
							[1, { v: 2, fill: true }],
							[3, { v: 4, strike: true }],
							[{ v: 44592, format: 'yyyy-mm-dd' }]
						],
						hiddenRows: [2],
						hiddenColumns: [2],
						filter: 'A1:B3'
					},
					{ name: 'Old', rows: [[1]], state: 'veryHidden' }
				],
				{ date1904: true }
			),
			'a.xlsx'
		);
		const [data, old] = workbook.sheets;
		expect(workbook.dateSystem).toBe(1904);
		expect([data.hiddenRows, data.hiddenColumns, data.filter, old.state]).toEqual([
			[[2, 2]],
			[[2, 2]],
			'A1:B3',
			'very hidden'
		]);
		expect(workbook.styles[data.rows[0].c[1][2] ?? 0].coloured).toBe(true);
		expect(workbook.styles[data.rows[1].c[1][2] ?? 0].struck).toBe(true);
		// 46054 in the 1900 system is 1 Feb 2026; the systems differ by 1462 days (ECMA-376-1, 18.17.4.1).
		expect(texts(workbook)[2]).toEqual(['2026-02-01']);
	});

	it('reads prefixed elements and a part in UTF-16', () => {
		const xml =
			'<x:worksheet xmlns:x="m"><x:sheetData><x:row r="2"><x:c r="B2"><x:v>7</x:v></x:c></x:row></x:sheetData></x:worksheet>';
		const wide = new Uint8Array(2 + xml.length * 2);
		wide.set([0xff, 0xfe]);
		[...xml].forEach((c, i) => (wide[2 + i * 2] = c.charCodeAt(0)));
		for (const body of [xml, wide]) {
			const workbook = readBytes(
				pack(workbookParts([{ rows: [] }], { parts: { 'xl/worksheets/sheet1.xml': body } })),
				'a.xlsx'
			);
			expect(workbook.sheets[0].rows).toEqual([{ r: 2, c: [[2, 7]] }]);
		}
	});
});

describe('text tables', () => {
	const rows = (text: string | Uint8Array, name = 'a.csv') =>
		texts(readBytes(typeof text === 'string' ? strToU8(text) : text, name));
	const expected = [
		['t (min)', 'A (°)'],
		['0', '1,5'],
		['10', '0,75']
	];

	it.each([
		['semicolons and decimal commas', 't (min);A (°)\n0;1,5\n10;0,75\n'],
		['tabs', 't (min)\tA (°)\n0\t1,5\n10\t0,75\n'],
		['quoted commas', '"t (min)","A (°)"\r\n0,"1,5"\r\n10,"0,75"\r\n'],
		['a separator line', 'sep=;\r\nt (min);A (°)\r\n0;1,5\r\n10;0,75'],
		['bars', 't (min)|A (°)\n0|1,5\n10|0,75']
	])('reads %s', (_, text) => {
		expect(rows(text)).toEqual(expected);
	});

	it('reads UTF-8 with a mark, UTF-16 of both orders with and without one, and Windows-1252', () => {
		const text = 't (min);A (°)\n0;1,5\n10;0,75\n';
		const wide = (little: boolean, mark: boolean) => {
			const codes = [...((mark ? '\ufeff' : '') + text)].map((c) => c.charCodeAt(0));
			return new Uint8Array(codes.flatMap((c) => (little ? [c & 255, c >> 8] : [c >> 8, c & 255])));
		};
		const ansi = new Uint8Array([...text].map((c) => c.charCodeAt(0)));
		for (const bytes of [
			strToU8('\ufeff' + text),
			wide(true, true),
			wide(false, true),
			wide(true, false),
			wide(false, false),
			ansi
		])
			expect(rows(bytes)).toEqual(expected);
	});

	it('keeps text as text: formulas, markup and names of JavaScript objects are inert', () => {
		const workbook = readBytes(
			strToU8('t (h),__proto__,constructor\n0,=1+1,<b>x</b>\n1,@SUM(A1),+2'),
			'a.csv'
		);
		expect(texts(workbook)).toEqual([
			['t (h)', '__proto__', 'constructor'],
			['0', '=1+1', '<b>x</b>'],
			['1', '@SUM(A1)', '+2']
		]);
		expect(workbook.sheets[0].rows[1].c[1]).toEqual([2, '=1+1']);
	});

	it('reads the clipboard by the same rules', () => {
		const workbook = readPaste('t (h)\tA (mol/L)\n0\t0,5\n1\t0,25\n');
		expect([workbook.kind, workbook.delimiter]).toEqual(['paste', '\t']);
		expect(texts(workbook)[1]).toEqual(['0', '0,5']);
	});
});

describe('file names', () => {
	it('lose folders, control and direction marks, and are cut', () => {
		expect(plainFileName('../../etc/passwd')).toBe('passwd');
		expect(plainFileName('C:\\temp\\run.xlsx')).toBe('run.xlsx');
		expect(plainFileName('run\u202excod.xlsx\u0000')).toBe('runxcod.xlsx');
		expect(plainFileName('/')).toBe('sheet');
		expect(plainFileName('a'.repeat(300) + '.xlsx')).toHaveLength(120);
		expect(plainFileName('a'.repeat(300) + '.xlsx')).toMatch(/a\.xlsx$/);
	});
});
