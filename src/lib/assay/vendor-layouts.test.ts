/** Sheets as instruments, offices and contract laboratories send them (all invented): several runs on a sheet, headers and layout. */
import { describe, expect, it } from 'vitest';
import {
	answer,
	book,
	conditions,
	csv,
	first,
	notesIn as notes,
	openIn as open,
	rolesOf as roles,
	species,
	timesOf,
	valuesOf
} from '../server/sheets/reading/test-tables';
import type { TestCell } from '../server/sheets/reading/test-workbook';
import { propose, settle } from './index';

const T = [0, 1, 2, 4, 8];
const A = [0.5, 0.4, 0.3, 0.2, 0.1];
const B = [0, 0.1, 0.2, 0.3, 0.4];

describe('several runs on a sheet', () => {
	it('under labels of their own with one time column are two runs, each with its temperature', () => {
		const workbook = book(
			[
				[null, 'Run 1 (40 °C)', null, 'Run 2 (60 °C)', null],
				['Time (h)', 'A (mol/L)', 'B (mol/L)', 'A (mol/L)', 'B (mol/L)'],
				...T.map((t, i): TestCell[] => [t, A[i], B[i], A[i] / 2, B[i] / 2])
			],
			{ merges: ['B1:C1', 'D1:E1'] }
		);
		const { tables } = propose(workbook, species);
		expect(tables.map((t) => [t.title, t.suggested.temperature?.value])).toEqual([
			['Run 1 (40 °C)', 40],
			['Run 2 (60 °C)', 60]
		]);
		const values = tables.map(({ mapping }) =>
			settle({ workbook, species, mapping: { ...mapping, conditions } }).run?.timepoints.map(
				(p) => p.values.A
			)
		);
		expect(values).toEqual([A, A.map((a) => a / 2)]);
	});

	it('side by side, of different length, below a label each', () => {
		const workbook = book(
			[
				['Run 1 - 40 °C', null, null, 'Run 2 - 60 °C', null],
				['Time (h)', 'A (mol/L)', null, 'Time (h)', 'A (mol/L)'],
				...T.map((t, i): TestCell[] => [t, A[i], null, ...(i < 4 ? [t / 2, A[i]] : [null, null])])
			],
			{ merges: ['A1:B1', 'D1:E1'] }
		);
		expect(
			propose(workbook, species).tables.map((t) => [t.range, t.title, t.suggested.temperature?.value])
		).toEqual([
			['A3:B7', 'Run 1 - 40 °C', 40],
			['D3:E6', 'Run 2 - 60 °C', 60]
		]);
	});

	it('one below the other in one table: one question where the run changes, and the rest becomes a table', () => {
		const rows = ['R1', 'R2'].flatMap((run) => T.map((t, i): TestCell[] => [run, t, A[i]]));
		const workbook = book([['Run', 'Time (h)', 'A (mol/L)'], ...rows]);
		expect(open(workbook)).toEqual(['B18 B7']);
		expect(first(workbook).findings[0].message).toBe(
			'B7 0 comes after 8. Column A changes from "R1" to "R2" here. Typing error or a new run?'
		);
		const { rest, run } = answer(workbook, { B18: { key: 'new-run' } });
		expect([run?.timepoints.length, rest?.firstRow]).toEqual([5, 7]);
	});

	it('rows of numbers that belong to no table are pointed out', () => {
		const rows = T.map((t, i): TestCell[] => [t, A[i]]);
		const workbook = book([['Time (h)', 'A (mol/L)'], ...rows, [], [], [], [], [9, 0.08], [10, 0.07]]);
		expect(propose(workbook, species).findings.map((f) => [f.level, f.rule, f.message])).toEqual([
			[
				'note',
				'B28',
				'Rows 11–12 of "Data" hold numbers and belong to no table; not used. Mark them by hand if they belong to the data.'
			]
		]);
	});
});

describe('headers and layout', () => {
	it('a limit row above the names, units below them, comments at the right, initials below', () => {
		const workbook = book([
			['LOQ', null, 0.002, 0.003, null],
			['Probe', 'Zeit', 'HX-14', 'HX-14b', 'Bemerkung'],
			[null, 'h', 'mol/L', 'mol/L', null],
			...T.map((t, i): TestCell[] => [
				`P${i}`,
				t,
				A[i],
				i === 0 ? '<LOQ' : B[i],
				i === 3 ? 'leicht trüb' : null
			]),
			['geprüft: MO, 12.11.2026']
		]);
		const [f] = first(workbook).findings.filter((f) => f.rule === 'B8');
		expect(f.options[0].needsValue).toMatchObject([{ suggested: 0.003, source: 'D1' }]);
		expect(first(workbook).title).toBe('Data');
	});

	it('blank spacer columns between the series are none of them', () => {
		const workbook = book([
			['Zeit', null, 'HX-14', null, 'HX-14b'],
			['h', null, 'mol/L', null, 'mol/L'],
			[],
			...T.map((t, i): TestCell[] => [t, null, A[i], null, B[i]])
		]);
		expect(open(workbook)).toEqual([]);
		expect(valuesOf(answer(workbook, {}), 'B')).toEqual(B);
	});

	it('a line on the method below the names does not hide them', () => {
		const workbook = book([
			['Time (h)', 'A (mol/L)', 'B (mol/L)'],
			['(from end of addition)', 'HPLC-UV 254 nm', 'HPLC-UV 254 nm'],
			...T.map((t, i): TestCell[] => [t, A[i], B[i]])
		]);
		expect(roles(workbook)).toEqual([
			['time', 'h', null],
			['species', 'mol/L', 'A'],
			['species', 'mol/L', 'B']
		]);
	});

	it('names and units in the ways of writing met most', () => {
		const workbook = book([
			['t/min', 'c(A) / (mol/L)', '[B]/M', 'C in mmol/l', 'A\n(mmol·L⁻¹)', 'B [µmol/mL]'],
			...T.map((t, i): TestCell[] => [t, A[i], B[i], 1, 1, 1])
		]);
		expect(roles(workbook)).toEqual([
			['time', 'min', null],
			['species', 'mol/L', 'A'],
			['species', 'mol/L', 'B'],
			['species', 'mmol/L', 'C'],
			['species', 'mmol/L', 'A'],
			['species', 'mmol/L', 'B']
		]);
	});

	it('B4: a unit that is not known is quoted; columns alike are asked about together, or each where they differ', () => {
		const unknown = book([['Time (h)', 'C (mg/g)'], ...T.map((t): TestCell[] => [t, 1 + t])]);
		expect(first(unknown).findings[0].message).toBe(
			'Column B is headed "mg/g", which is no unit that is read here. Choose the one that the values are in; we will not assume.'
		);
		const percent = (v: number): TestCell => ({ v, format: '0.0%' });
		const alike = book([
			['Time (h)', 'HX-14', 'HX-14b'],
			...T.map((t, i): TestCell[] => [t, percent(A[i] * 2), percent(B[i] * 2)])
		]);
		expect(first(alike).findings.map((f) => [f.level, f.cells.join(), f.message])).toEqual([
			['stop', 'B1,C1', 'Columns B–C are in %. Percent of what? We will not assume.']
		]);
		expect(valuesOf(answer(alike, { B4: { key: '% of charge' } }))?.[1]).toBe(80);
		const each = settle({
			workbook: alike,
			species,
			mapping: { ...first(alike).mapping, conditions },
			answers: { 'B4:Data!units-percent': { key: 'each' } }
		});
		expect(each.findings.filter((f) => f.open).map((f) => f.cells.join())).toEqual(['B1', 'C1']);
	});

	it('B3: while it is open which quantity counts, the response of the other is not asked', () => {
		const workbook = book([
			['t (min)', 'A conc. [mM]', 'A area [mAU*s]'],
			...T.map((t, i): TestCell[] => [t, A[i] * 1000, A[i] * 1e4])
		]);
		expect(open(workbook)).toEqual(['B3 B1']);
		expect(valuesOf(answer(workbook, { B3: { key: 'use:mmol/L' } }))).toEqual(A);
	});

	it('dates of sampling beside the elapsed time are no series', () => {
		const workbook = book([
			['#', 'Sampled at', 'elapsed h', 'A mM', 'initials'],
			...T.map((t, i): TestCell[] => [
				i + 1,
				{ v: 46_000.4 + t / 24, format: 'dd.mm.yyyy hh:mm' },
				t,
				A[i] * 1000,
				'MO'
			])
		]);
		expect(open(workbook)).toEqual([]);
		expect(timesOf(answer(workbook, {}))).toEqual(T);
	});

	it('text whose columns are parted by spaces is read as well', () => {
		const rows = T.map((t, i) => `${t}      ${A[i]}     ${B[i]}`);
		const workbook = csv(`time/h   A(mol/L)   B(mol/L)\n${rows.join('\n')}\n`);
		expect(workbook.delimiter).toBe('spaces');
		expect(valuesOf(answer(workbook, {}), 'B')).toEqual(B);
	});

	it('B32: a column of numbers without a name is noted, not passed over in silence', () => {
		const workbook = book([['Time (h)', 'A (mol/L)', null], ...T.map((t, i): TestCell[] => [t, A[i], B[i]])]);
		expect(notes(workbook)).toEqual([
			'Column C holds numbers and has no header; shown and not used. Say what it is if it belongs to the data.'
		]);
	});

	it('B6: decimal commas in a file parted by commas stop, because no number can be told', () => {
		const workbook = csv('Time (h),A (mol/L)\n0,0,5\n1,0,4\n2,0,3\n4,0,2\n');
		expect(first(workbook).findings[0]).toMatchObject({ level: 'stop', rule: 'B6', open: true });
		expect(first(workbook).findings[0].message).toContain('commas seem to part both columns and decimals');
	});

	it('B27: a remark or the header once more between the samples does not end the table', () => {
		const rows = T.map((t, i): TestCell[] => [t, A[i]]);
		const between = (row: TestCell[]) =>
			book([['Time (h)', 'A (mol/L)'], ...rows.slice(0, 2), row, ...rows.slice(2)]);
		const remark = between(['stirrer stopped for 10 min']);
		expect([first(remark).range, notes(remark)]).toEqual([
			'A2:B7',
			['Row 4 between the samples ("stirrer stopped for 10 min") is shown and not used.']
		]);
		const again = between(['Time (h)', 'A (mol/L)']);
		expect(propose(again, species).tables.map((t) => t.range)).toEqual(['A2:B7']);
		for (const workbook of [remark, again]) expect(valuesOf(answer(workbook, {}))).toEqual(A);
		const anew = book([['Time (h)', 'A (mol/L)'], ...rows, ['Time (h)', 'A (mol/L)'], ...rows]);
		expect(propose(anew, species).tables.map((t) => t.range)).toEqual(['A2:B6', 'A8:B12']);
	});

	it('B4: a log in °F is not taken for °C; a retention time behind a name is no part of it', () => {
		const workbook = book([
			['Time (h)', 'T (°F)', 'HX-14 @ 7.31 min (mol/L)'],
			...T.map((t, i): TestCell[] => [t, 122, A[i]])
		]);
		expect(roles(workbook).map(([role, , id]) => [role, id])).toEqual([
			['time', null],
			['temperature', null],
			['species', 'A']
		]);
		expect(first(workbook).findings[0].message).toContain('is headed in °F, which is not read here');
		const { run } = answer(workbook, { B4: { key: 'ignore' } });
		expect([run?.timepoints.length, run?.temperatureLog]).toEqual([5, undefined]);
	});
});
