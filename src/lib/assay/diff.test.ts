import { strToU8 } from 'fflate';
import { describe, expect, it } from 'vitest';
import { readBytes } from '../server/sheets/reading/read';
import { oneSheet, type TestCell } from '../server/sheets/reading/test-workbook';
import { diffWorkbooks } from './index';
import { alignRows } from './row-alignment';

const HEAD: TestCell[] = ['Time (h)', 'A (mol/L)', 'B (mol/L)'];
const ROWS: TestCell[][] = [
	[0, 0.5, 0],
	[1, 0.4, 0.1],
	[2, 0.3, 0.2],
	[4, 0.1, 0.4]
];
const book = (rows: TestCell[][]) => readBytes(oneSheet([HEAD, ...rows]), 'x.xlsx');
const differ = (after: TestCell[][], before = ROWS) => diffWorkbooks(book(before), book(after));

describe('the difference of two files', () => {
	it('shows an inserted row as one insertion', () => {
		const { changes, count } = differ([...ROWS.slice(0, 3), [3, 0.2, 0.3], ROWS[3]]);
		expect(count).toBe(1);
		expect(changes).toEqual([
			{ sheet: 'Data', cell: 'A5', before: '', after: '3 | 0.2 | 0.3', row: 'inserted' }
		]);
	});

	it('shows a removed row with its place in the old file, and a change below it at both addresses', () => {
		expect(differ([ROWS[0], ROWS[2], [4, 0.12, 0.4]]).changes).toEqual([
			{ sheet: 'Data', cell: 'A3', before: '1 | 0.4 | 0.1', after: '', row: 'removed' },
			{ sheet: 'Data', cell: 'B4', was: 'B5', before: '0.1', after: '0.12' }
		]);
	});

	it('keeps a corrected value beside an inserted row a change of one cell', () => {
		const { changes } = differ([ROWS[0], [1, 0.41, 0.1], [1.5, 0.35, 0.15], ...ROWS.slice(2)]);
		expect(changes).toMatchObject([
			{ cell: 'B3', before: '0.4', after: '0.41' },
			{ cell: 'A4', row: 'inserted' }
		]);
	});

	it('a blank row in between changes nothing', () => {
		expect(differ([ROWS[0], [], ...ROWS.slice(1)]).count).toBe(0);
	});

	it('an altered value at equal places has one address', () => {
		expect(differ([ROWS[0], ROWS[1], [2, 0.31, 0.2], ROWS[3]]).changes).toEqual([
			{ sheet: 'Data', cell: 'B4', before: '0.3', after: '0.31' }
		]);
	});

	it('files of another length throughout are still compared', () => {
		const text = (n: number, k: number) =>
			readBytes(strToU8(Array.from({ length: n }, (_, i) => `${i * k},${i}`).join('\n')), 'x.csv');
		expect(diffWorkbooks(text(900, 1), text(1200, 7)).count).toBeGreaterThan(300);
	});
});

describe('rows brought together', () => {
	const align = (a: string, b: string) => alignRows([...a], [...b], () => 0);

	it('finds the common rows of the example in the paper of Myers (1986), section 2: ABCABBA and CBABAC share four', () => {
		const pairs = align('ABCABBA', 'CBABAC');
		const equal = pairs.filter(([i, j]) => i !== null && j !== null && 'ABCABBA'[i] === 'CBABAC'[j]);
		expect(equal).toHaveLength(4);
	});

	it('names each row of both sides once, in order, whatever they hold', () => {
		let seed = 7;
		const random = () => (seed = (seed * 1103515245 + 12345) % 2147483648) / 2147483648;
		const word = () =>
			Array.from({ length: Math.floor(random() * 9) }, () => 'abc'[Math.floor(random() * 3)]).join('');
		for (let n = 0; n < 300; n++) {
			const [a, b] = [word(), word()];
			const pairs = align(a, b);
			expect(pairs.flatMap(([i]) => (i === null ? [] : [i]))).toEqual([...a].map((_, i) => i));
			expect(pairs.flatMap(([, j]) => (j === null ? [] : [j]))).toEqual([...b].map((_, j) => j));
		}
	});
});
