import { describe, expect, it } from 'vitest';
import { literal, letters } from './sheet-writer';
import { cellText, looksLikeFormula } from './text';

describe('text on its way into a workbook', () => {
	it('loses control characters and half characters, and nothing else', () => {
		expect(cellText('a\u0000b\u0007c\u001Fd')).toBe('abcd');
		expect(cellText('line\nbreak\ttab')).toBe('line\nbreak\ttab');
		expect(cellText('half \uD83D end')).toBe('half \uFFFD end');
		expect(cellText('whole 😀 µmol')).toBe('whole 😀 µmol');
	});
	it('does not become a character code', () => {
		expect(cellText('_x0041_')).toBe('_x005F_x0041_');
		expect(cellText('a_x_b')).toBe('a_x_b');
	});
	it('fits into a cell', () => {
		expect(cellText('x'.repeat(40_000))).toHaveLength(32_767);
	});
	it('knows what a spreadsheet might take for a formula', () => {
		for (const text of ['=1', '+1', '-1', '@a', '\t=1', '\r=1']) expect(looksLikeFormula(text)).toBe(true);
		for (const text of ['A → B', '0.5', "'=1", '']) expect(looksLikeFormula(text)).toBe(false);
	});
});

describe('cells and numbers in formulas', () => {
	it('name columns as spreadsheets do', () => {
		expect([1, 26, 27, 702, 703].map(letters)).toEqual(['A', 'Z', 'AA', 'ZZ', 'AAA']);
	});
	it('write no exponent, and negative numbers in brackets', () => {
		expect(literal(0.001)).toBe('0.001');
		expect(literal(1e-9)).toBe('(1*10^-9)');
		expect(literal(2.5e21)).toBe('(2.5*10^21)');
		expect(literal(-3)).toBe('(-3)');
	});
});
