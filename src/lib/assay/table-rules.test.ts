/** The table and its columns (B1 to B3, B27 to B32): what is found, how it is said, what each answer does. */
import { describe, expect, it } from 'vitest';
import { readBytes } from '../server/sheets/reading/read';
import {
	species,
	conditions,
	HEAD,
	ROWS,
	changed,
	book,
	first,
	findingsOf,
	answer,
	valuesOf,
	summary
} from '../server/sheets/reading/test-tables';
import { workbookBytes } from '../server/sheets/reading/test-workbook';
import { propose, proposeBlock, settle } from './index';

it('the plain sheet has no finding, so that every other one is due to its change', () => {
	expect(first(book(changed({}))).findings).toEqual([]);
});

describe('the table', () => {
	it('B1: a blank row inside is asked about, with the rows', () => {
		const [f] = findingsOf(book([...changed({}).slice(0, 4), [], ...changed({}).slice(4)]), 'B1');
		expect(summary(f)).toEqual(['ask', 'A2 C8']);
		expect(f.message).toBe('We read rows 2–8 of "Data" as the data (1 blank row inside (5)). Is that right?');
	});

	it('B1: without headers the rising column is proposed as time, and asked', () => {
		const table = first(book(ROWS));
		expect(table.mapping.columns.map((c) => c.role)).toEqual(['time', 'ignore', 'ignore']);
		expect(table.findings.map((f) => f.rule)).toContain('B1');
	});

	it('B1: a sheet without a table says what is expected', () => {
		const [f] = propose(book([['Minutes of the meeting'], ['nothing to see']]), species).findings;
		expect([f.level, f.rule, f.open]).toEqual(['stop', 'B1', true]);
	});

	it('B1: a block drawn by hand is read with the headers above it', () => {
		const table = proposeBlock(book(changed({})), species, 'Data', {
			firstRow: 3,
			lastRow: 5,
			firstColumn: 1,
			lastColumn: 2
		});
		expect(table?.columns.map((c) => [c.role, c.species])).toEqual([
			['time', null],
			['species', 'A']
		]);
		expect(table?.mapping.block.firstRow).toBe(3);
	});

	it('B2: merged and unmerged super-headers are carried over their columns and noted', () => {
		const rows = [['Time', 'Concentration (mmol/L)', null], ['h', 'A', 'B'], ...ROWS];
		for (const merges of [['B1:C1'], []]) {
			const table = first(book(rows, { merges }));
			expect(table.columns.map((c) => [c.header, c.unit])).toEqual([
				['Time / h', 'h'],
				['Concentration (mmol/L) / A', 'mmol/L'],
				['Concentration (mmol/L) / B', 'mmol/L']
			]);
			expect(table.findings.map((f) => [f.level, f.rule])).toEqual([['note', 'B2']]);
		}
	});

	it('B3: two quantities are never merged, one is chosen and the other kept', () => {
		const rows = [['Time (h)', 'A (area %)', 'A (mol/L)'], ...ROWS.map(([t, a]) => [t, Number(a) * 200, a])];
		const workbook = book(rows);
		expect(findingsOf(workbook, 'B3')[0].message).toBe(
			'Column B is area %, column C is mol/L. Which should be fitted?'
		);
		const settled = answer(workbook, { B3: { key: 'use:mol/L' } });
		expect(valuesOf(settled)).toEqual([0.5, 0.4, 0.3, 0.2, 0.1, 0.05]);
		expect(settled.conversions).toContain('Column B (area %) kept for reference, not fitted.');
	});

	it('B27 and B25: mean, RSD, limits and errors below the data are shown and left out', () => {
		const rows = [
			...changed({}),
			['Mean', { f: 'AVERAGE(B2:B7)', v: 0.26 }, null],
			['RSD', { error: '#DIV/0!' }, null]
		];
		const table = first(book(rows));
		expect(table.range).toBe('A2:C7');
		expect(table.footerRows.map((f) => f.row)).toEqual([8, 9]);
		expect(table.findings.map((f) => [f.level, f.rule, f.cells.join()])).toEqual([
			['note', 'B27', 'A8,A9'],
			['note', 'B25', 'B9']
		]);
	});

	it('B28: tables below and beside each other and on other sheets are offered one by one', () => {
		const beside = changed({}).map((row) => [...row, null, ...row]);
		const workbook = readBytes(
			workbookBytes([
				{ name: '40 °C', rows: [['Run 1'], ...changed({}), [], [], ['Run 2'], ...changed({})] },
				{ name: '60 °C', rows: beside }
			]),
			'x.xlsx'
		);
		const { tables } = propose(workbook, species);
		expect(tables.map((t) => [t.sheet, t.range, t.title])).toEqual([
			['40 °C', 'A3:C8', 'Run 1'],
			['40 °C', 'A13:C18', 'Run 2'],
			['60 °C', 'A2:C7', '60 °C'],
			['60 °C', 'E2:G7', '60 °C']
		]);
		expect(tables.map((t) => t.suggested.temperature?.value)).toEqual([40, 40, 60, 60]);
		expect(tables.every((t) => t.findings.length === 0)).toBe(true);
	});

	it('B29: hidden rows, columns and sheets and filters are asked, never dropped or used silently', () => {
		const hidden = book(changed({}), { hiddenRows: [4], hiddenColumns: [3], filter: 'A1:C7' });
		expect(findingsOf(hidden, 'B29').map((f) => [f.level, f.cells.join()])).toEqual([
			['ask', 'A4'],
			['ask', 'C2']
		]);
		expect(findingsOf(hidden, 'B29')[0].message).toContain('a filter is on: A1:C7');
		expect(valuesOf(answer(hidden, { B29: { key: 'leave-out' } }))).toEqual([0.5, 0.4, 0.2, 0.1, 0.05]);
		expect(valuesOf(answer(hidden, { B29: { key: 'include' } }))).toHaveLength(6);
		const sheet = readBytes(workbookBytes([{ name: 'S', rows: changed({}), state: 'hidden' }]), 'x.xlsx');
		expect(first(sheet).findings.map((f) => [f.rule, f.open])).toEqual([['B29', true]]);
	});

	it('B30: colours and strike-through are pointed out, not interpreted', () => {
		const [f] = findingsOf(
			book(changed({ '1,1': { v: 0.4, fill: true }, '2,2': { v: 0.2, strike: true } })),
			'B30'
		);
		expect(summary(f)).toEqual(['note', 'B3 C4']);
		expect(f.message).toContain('1 coloured, 1 struck through');
	});

	it('B31: a time cell merged over replicates holds for each row', () => {
		const rows = [HEAD, ...ROWS.slice(0, 2), [null, 0.41, 0.09], ...ROWS.slice(2)];
		const workbook = book(rows, { merges: ['A3:A4'] });
		expect(findingsOf(workbook, 'B31')[0].cells).toEqual(['A3']);
		const settled = answer(workbook, { B19: { key: 'samples' } });
		expect(settled.run?.timepoints.map((p) => p.time)).toEqual([0, 1, 1, 2, 3, 4, 5]);
	});

	it('B32: an unknown column is asked; a sum of species and a new species can be named', () => {
		const workbook = book(changed({}, ['Time (h)', 'A (mol/L)', 'RRT 0.87 (mol/L)']));
		const [f] = findingsOf(workbook, 'B32');
		expect([...summary(f)!, f.message]).toEqual([
			'ask',
			'C1',
			'Column C, "RRT 0.87 (mol/L)", is no species of the scheme. What is it?'
		]);
		expect(
			answer(workbook, { B32: { key: 'sum', values: { value: 'B + 0.5 C' } } }).run?.channels[1]
		).toMatchObject({ id: 'B_C', weights: { B: 1, C: 0.5 } });
		expect(
			answer(workbook, { B32: { key: 'sum', values: { value: 'B + Q' } } }).findings[0].problem
		).toContain('is not a sum of species');
		const added = answer(workbook, { B32: { key: 'new', values: { value: 'D' } } });
		expect([added.run, added.needs]).toEqual([
			null,
			[{ field: 'species', species: 'D', message: 'Add the species D to the scheme.' }]
		]);
		expect(answer(workbook, { B32: { key: 'new', values: { value: '__proto__' } } }).open).toBe(1);
		expect(answer(workbook, { B32: { key: 'ignore' } }).run?.channels.map((c) => c.id)).toEqual(['A']);
	});

	it.each(['Dilution', 'Verdünnung'])(
		'B32: a column of dilutions (%s) is asked, not passed over in silence',
		(head) => {
			const workbook = book(changed({}, ['Time (h)', 'A (mol/L)', head]));
			expect(findingsOf(workbook, 'B32')[0]).toMatchObject({ level: 'ask', open: true });
		}
	);

	it('B32: names match but for case, with "conc." and brackets around them, and by name and symbol', () => {
		const heads = [
			'a (mol/L)',
			'[B] (mol/L)',
			'c(C) / mol/L',
			'conc. HX-14 [mol/L]',
			'HX-14b (B) mmol/L',
			'Lactone area'
		];
		const rows = [['t / h', ...heads], ...ROWS.map((r) => [r[0], 1, 2, 3, 4, 5, 6])];
		const table = first(book(rows));
		expect(table.columns.map((c) => c.species)).toEqual([null, 'A', 'B', 'C', 'A', 'B', 'C']);
		expect(table.columns.map((c) => c.unit)).toEqual([
			'h',
			'mol/L',
			'mol/L',
			'mol/L',
			'mol/L',
			'mmol/L',
			'area'
		]);
	});

	it('B1 and B32: a mapping without times, or without anything measured, stops and says what to choose', () => {
		const workbook = book(changed({}));
		const { mapping } = first(workbook);
		const only = (role: 'time' | 'species') => ({
			...mapping,
			columns: mapping.columns.map((c) =>
				c.role === role ? c : { ...c, role: 'ignore' as const, weights: undefined }
			)
		});
		const stops = (role: 'time' | 'species') =>
			settle({ workbook, species, mapping: only(role) })
				.findings.filter((f) => f.level === 'stop')
				.map((f) => [f.id, f.message]);
		expect(stops('species')[0]).toEqual([
			'B1:Data!time',
			'No column is marked as time. Choose the one that holds the sampling times.'
		]);
		expect(stops('time')).toEqual([
			['B32:Data!none', 'No column is read as a species. Choose at least one.']
		]);
	});

	it('B30: marked values can be left as missing in place', () => {
		const workbook = book(changed({ '1,1': { v: 0.4, fill: true }, '2,2': { v: 0.2, strike: true } }));
		const [f] = findingsOf(workbook, 'B30');
		const mapping = { ...first(workbook).mapping, conditions };
		const { run } = settle({ workbook, species, mapping, answers: { [f.id]: { key: 'missing' } } });
		expect(run?.timepoints.slice(1, 3).map((p) => p.values)).toEqual([
			{ A: null, B: 0.1 },
			{ A: 0.3, B: null }
		]);
		expect(run?.conversions?.join()).toContain(
			'B3, C4 left as missing: coloured or struck through on the sheet'
		);
	});
});
