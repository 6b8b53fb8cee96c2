/** Sheets as instruments and offices export them: what could put a wrong number into a run without a word, and what must not stop it. */
import { strToU8 } from 'fflate';
import { describe, expect, it } from 'vitest';
import type { GridWorkbook, Mapping } from '../schemas/sheet';
import { readBytes } from '../server/sheets/reading/read';
import {
	oneSheet,
	type TestCell,
	type TestOptions,
	type TestSheet
} from '../server/sheets/reading/test-workbook';
import { propose, settle } from './index';

const species = [
	{ id: 'A', name: 'HX-14', role: 'starting material' as const },
	{ id: 'B', name: 'HX-14b' }
];
const conditions: Mapping['conditions'] = {
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	excess: {}
};
const book = (rows: TestCell[][], more: Omit<TestSheet, 'rows'> = {}, options: TestOptions = {}) =>
	readBytes(oneSheet(rows, more, options), 'x.xlsx');
const csv = (text: string) => readBytes(strToU8(text), 'x.csv');

/** Settles the first table; each open finding of a rule gets the answer of that rule. */
function read(workbook: GridWorkbook, byRule: Record<string, string> = {}) {
	const mapping = { ...propose(workbook, species).tables[0].mapping, conditions };
	const before = settle({ workbook, species, mapping });
	const answers = Object.fromEntries(
		before.findings.flatMap((f) =>
			f.open && Object.hasOwn(byRule, f.rule) ? [[f.id, { key: byRule[f.rule] }]] : []
		)
	);
	const after = settle({ workbook, species, mapping, answers });
	return {
		asked: before.findings.filter((f) => f.open).map((f) => f.rule),
		findings: before.findings,
		values: (id: string) => after.run?.timepoints.map((p) => p.values[id]),
		times: after.run?.timepoints.map((p) => p.time),
		after
	};
}

const HEAD: TestCell[] = ['Time (h)', 'A (mol/L)', 'B (mol/L)'];
const ROWS: TestCell[][] = [
	[0, 0.5, 0],
	[1, 0.4, 0.1],
	[2, 0.3, 0.2],
	[3, 0.2, 0.3]
];

describe('rows that are no samples', () => {
	it('the totals row of a table, whose summed time goes on rising, is no sample and is asked about (B1, B27)', () => {
		const total = [6, 1.4, 0.6].map((v, i) => ({ f: `SUBTOTAL(109,R[-4]C${i})`, v }));
		const { asked, values } = read(book([HEAD, ...ROWS, total]), { B1: 'right' });
		expect(asked).toEqual(['B1']);
		expect(values('A')).toEqual([0.5, 0.4, 0.3, 0.2]);
	});

	it('a row of means without a label is set apart too, with a text below it', () => {
		const { values } = read(book([HEAD, ...ROWS, [null, 0.35, 0.15], ['checked: AB']]), { B1: 'right' });
		expect(values('A')).toEqual([0.5, 0.4, 0.3, 0.2]);
	});

	it('a last sample that is no sum of the others stays a sample', () => {
		expect(read(book([HEAD, ...ROWS, [6, 0.1, 0.4]])).values('A')).toEqual([0.5, 0.4, 0.3, 0.2, 0.1]);
	});

	it('a blank at time zero and standards between the samples are asked about, never averaged in (B27)', () => {
		const workbook = csv(
			'Sample,Time (h),A (mol/L),B (mol/L)\nBlank,0,0.0,0\nS1,0,0.5,0\nS2,1,0.4,0.1\nStd 1,,0.1,0.1\nS3,2,0.3,0.2\nS4,3,0.2,0.3\n'
		);
		const { asked, findings, values } = read(workbook, { B27: 'leave-out' });
		expect(asked).toEqual(['B27']);
		expect(findings[0].cells).toEqual(['A2', 'A5']);
		expect(values('A')).toEqual([0.5, 0.4, 0.3, 0.2]);
	});

	it('samples with names such as S1, QX-1 or "standard conditions, 1 h" are not taken for standards', () => {
		const workbook = csv(
			'Sample,Time (h),A (mol/L)\nS1,0,0.5\nQX-1,1,0.4\n"standard conditions, 1 h",2,0.3\nIPC 3,3,0.2\n'
		);
		expect(read(workbook).asked).toEqual([]);
	});
});

describe('ways of writing numbers', () => {
	it('a raised footnote mark in a rich text never becomes a digit of the value', () => {
		const rich = '<is><r><t>0.4</t></r><r><rPr><vertAlign val="superscript"/></rPr><t>1</t></r></is>';
		const shared = `<sst><si>${rich.slice(4, -5)}</si></sst>`;
		const rows = (cell: string) =>
			`<worksheet><sheetData><row r="1"><c r="A1" t="inlineStr"><is><t>Time (h)</t></is></c><c r="B1" t="inlineStr"><is><t>A (mol/L)</t></is></c></row>${[
				0, 1, 2
			]
				.map(
					(t) =>
						`<row r="${t + 2}"><c r="A${t + 2}"><v>${t}</v></c>${t === 1 ? cell : `<c r="B${t + 2}"><v>0.5</v></c>`}</row>`
				)
				.join('')}</sheetData></worksheet>`;
		const inline = book(
			ROWS,
			{},
			{ parts: { 'xl/worksheets/sheet1.xml': rows(`<c r="B3" t="inlineStr">${rich}</c>`) } }
		);
		const relation =
			'<Relationships><Relationship Id="rId1" Type="a/worksheet" Target="worksheets/sheet1.xml"/><Relationship Id="x" Type="a/sharedStrings" Target="sharedStrings.xml"/></Relationships>';
		const parts = {
			'xl/worksheets/sheet1.xml': rows('<c r="B3" t="s"><v>0</v></c>'),
			'xl/sharedStrings.xml': shared,
			'xl/_rels/workbook.xml.rels': relation
		};
		for (const workbook of [inline, book(ROWS, {}, { parts })]) {
			const [f] = read(workbook).findings.filter((x) => x.open);
			expect([f.rule, f.cells, f.found]).toEqual(['B11', ['B3'], '"0.4¹"']);
		}
	});

	it('powers of ten written out are numbers, and do not turn the first sample into a header', () => {
		const rows = [HEAD, [0, '5.0×10⁻¹', '1.2 x 10^-4'], [1, '4·10^-1', '1.0 × 10-1'], ...ROWS.slice(2)];
		const { values } = read(book(rows));
		expect(values('A')).toEqual([0.5, 0.4, 0.3, 0.2]);
		expect(values('B')).toEqual([0.00012, 0.1, 0.2, 0.3]);
	});

	it('scientific notation with a decimal comma is read', () => {
		const workbook = csv(
			'Time (h);A (mol/L);B (mol/L)\n0;5,0E-01;1,23E-04\n1;4,0e-1;1E-01\n2;3,0E-01;2E-01\n'
		);
		expect(read(workbook).values('B')).toEqual([0.000123, 0.1, 0.2]);
	});

	it('footnote marks behind the name of a species do not hide it', () => {
		const { asked, values } = read(book([['Time (h)', 'A¹ (mol/L)', 'B* (mol/L)'], ...ROWS]));
		expect([asked, values('B')]).toEqual([[], [0, 0.1, 0.2, 0.3]]);
	});
});

describe('a date column beside the times of day', () => {
	const rows =
		'Date;Time;A (mol/L)\n30.01.2026;09:00;0,5\n;21:00;0,4\n31.01.2026;10:00;0,3\n02.02.2026;10:00;0,2\n';

	it('is read together with them, so that 10:00 of the next day is 25 h and not 1 h (B16)', () => {
		const workbook = csv(rows);
		const mapping = { ...propose(workbook, species).tables[0].mapping, conditions };
		const first = settle({ workbook, species, mapping });
		const [open] = first.findings.filter((f) => f.open);
		expect(open.message).toBe(
			'Column A holds dates (30.01.2026 to 02.02.2026) beside the times in column B. Times of day on these dates?'
		);
		expect(first.preview.map((p) => p.time)).toEqual([null, null, null, null]);
		const answers = { [open.id]: { key: 'together' } };
		const [start] = settle({ workbook, species, mapping, answers }).findings.filter((f) => f.open);
		expect(start.rule).toBe('B16');
		const { run } = settle({
			workbook,
			species,
			mapping,
			answers: { ...answers, [start.id]: { key: 'first' } }
		});
		expect([run?.timeUnit, run?.timepoints.map((p) => p.time)]).toEqual(['h', [0, 12, 25, 73]]);
	});

	it('stored as cells of a workbook: whole days and parts of a day', () => {
		const day = (v: number) => ({ v, format: 'dd.mm.yyyy' });
		const clock = (v: number) => ({ v, format: 'hh:mm' });
		const workbook = book([
			['Date', 'Time', 'A (mol/L)'],
			[day(46052), clock(0.375), 0.5],
			[day(46053), clock(0.375), 0.4],
			[day(46053), clock(0.75), 0.3]
		]);
		const mapping = { ...propose(workbook, species).tables[0].mapping, conditions };
		const [open] = settle({ workbook, species, mapping }).findings.filter((f) => f.open);
		const { preview, findings } = settle({
			workbook,
			species,
			mapping,
			answers: { [open.id]: { key: 'together' }, 'B16:Data!start': { key: 'first' } }
		});
		expect(findings.filter((f) => f.open)).toEqual([]);
		expect(preview.map((p) => p.time)).toEqual([0, 24, 33]);
	});

	it('on one date only, asks nothing about it', () => {
		const workbook = csv(
			'Date;Time;A (mol/L)\n30.01.2026;09:00;0,5\n30.01.2026;10:00;0,4\n30.01.2026;11:00;0,3\n'
		);
		expect(read(workbook).findings.filter((f) => f.rule === 'B16')).toEqual([]);
	});
});
