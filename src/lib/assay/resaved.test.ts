/**
 * The trial sheets of the invented reaction HX-14 as a free spreadsheet program saves them again: an xlsx from the csv, a
 * semicolon list in UTF-8, a tab list in UTF-16, and the messy workbook. What is read must not depend on who saved it.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { readBytes } from '../server/sheets/reading/read';
import { propose } from './index';

const species = [
	{ id: 'A', name: 'HX-14', role: 'starting material' as const, molarMassGPerMol: 214.2 },
	{ id: 'B', name: 'HX-14b', role: 'intermediate' as const },
	{ id: 'C', name: 'lactone', role: 'product' as const }
];
const read = (name: string) => {
	const workbook = readBytes(readFileSync(new URL(`../../../tests/fixtures/${name}`, import.meta.url)), name);
	return { workbook, ...propose(workbook, species) };
};
/** Every filled cell as text: a list has text where a workbook has numbers. */
const cellsOf = ({ workbook }: ReturnType<typeof read>) =>
	workbook.sheets.map((sheet) =>
		sheet.rows.flatMap(({ r, c }) =>
			c.flatMap(([column, value]) => (value === null || value === '' ? [] : [`${r}:${column} ${value}`]))
		)
	);
const codes = ({ tables }: ReturnType<typeof read>) =>
	tables.map((t) => t.findings.map((f) => `${f.level} ${f.rule} ${f.cells.join(' ')}`).sort());

describe('a sheet saved again by another program', () => {
	const clean = read('s01_clean_50C.csv');

	it.each(['s01.xlsx', 's01-semicolon.csv', 's01-tab-utf16.csv'])('%s gives the same table', (name) => {
		const again = read(`resaved/${name}`);
		expect(again.tables.map((t) => t.range)).toEqual(clean.tables.map((t) => t.range));
		expect(codes(again)).toEqual(codes(clean));
		expect(cellsOf(clean)[0].length).toBeGreaterThan(48);
		expect(cellsOf(again)).toEqual(cellsOf(clean));
	});

	it('the messy workbook keeps its tables, its numbers and what is asked about them', () => {
		const messy = read('s02_messy.xlsx');
		const again = read('resaved/s02.xlsx');
		expect(again.tables.map((t) => t.range)).toEqual(messy.tables.map((t) => t.range));
		expect(cellsOf(again)).toEqual(cellsOf(messy));
		expect(codes(again)).toEqual(codes(messy));
	});
});
