/** Each rule of the reader on a workbook that breaks it: what is found, how it is said, what each answer does. */
import { strToU8 } from 'fflate';
import { describe, expect, it } from 'vitest';
import type { Answer, CellCorrection, Finding, GridWorkbook, Mapping } from '../schemas/sheet';
import { readBytes } from '../server/sheets/reading/read';
import {
	oneSheet,
	workbookBytes,
	type TestCell,
	type TestOptions,
	type TestSheet
} from '../server/sheets/reading/test-workbook';
import { propose, proposeBlock, settle, toSavedMapping } from './index';

const species = [
	{ id: 'A', name: 'HX-14', role: 'starting material' as const },
	{ id: 'B', name: 'HX-14b' },
	{ id: 'C', name: 'lactone' }
];
const conditions: Mapping['conditions'] = {
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	excess: {}
};

const HEAD: TestCell[] = ['Time (h)', 'A (mol/L)', 'B (mol/L)'];
const ROWS: TestCell[][] = [
	[0, 0.5, 0],
	[1, 0.4, 0.1],
	[2, 0.3, 0.2],
	[3, 0.2, 0.3],
	[4, 0.1, 0.4],
	[5, 0.05, 0.45]
];
/** The plain sheet with single cells changed, given by row of data and column. */
const changed = (cells: Record<string, TestCell>, head = HEAD): TestCell[][] => [
	head,
	...ROWS.map((row, i) => row.map((v, j) => (Object.hasOwn(cells, `${i},${j}`) ? cells[`${i},${j}`] : v)))
];

const book = (rows: TestCell[][], more: Omit<TestSheet, 'rows'> = {}, options: TestOptions = {}) =>
	readBytes(oneSheet(rows, more, options), 'x.xlsx');
const csv = (text: string) => readBytes(strToU8(text), 'x.csv');
const first = (workbook: GridWorkbook, list = species) => propose(workbook, list).tables[0];
const findingsOf = (workbook: GridWorkbook, rule: string) =>
	first(workbook).findings.filter((f) => f.rule === rule);

/** Settles with answers given by rule; the answer goes to every finding of the rule. */
function answer(
	workbook: GridWorkbook,
	byRule: Record<string, Answer>,
	mapping?: Partial<Mapping>,
	corrections: CellCorrection[] = []
) {
	const base = { ...first(workbook).mapping, conditions, ...mapping };
	let answers: Record<string, Answer> = {};
	// A later question may only arise once an earlier one is answered.
	for (let round = 0; round < 4; round++) {
		const { findings } = settle({ workbook, species, mapping: base, answers, corrections });
		answers = Object.fromEntries(
			findings.flatMap((f) =>
				Object.hasOwn(byRule, f.rule) && f.level !== 'note' ? [[f.id, byRule[f.rule]]] : []
			)
		);
	}
	return settle({ workbook, species, mapping: base, answers, corrections });
}
const valuesOf = (s: ReturnType<typeof settle>, id = 'A') => s.run?.timepoints.map((p) => p.values[id]);
const summary = (f: Finding | undefined) => f && [f.level, f.cells.join(' ')];

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
});

describe('units', () => {
	it('B4: a column without a unit stops, and no unit is assumed', () => {
		const workbook = book(changed({}, ['Time (h)', 'A', 'B (mol/L)']));
		const [f] = findingsOf(workbook, 'B4');
		expect([...summary(f)!, f.message]).toEqual([
			'stop',
			'B1',
			'Column B has no unit. Choose one; we will not assume.'
		]);
		expect(valuesOf(answer(workbook, { B4: { key: 'mmol/L' } }))).toEqual([
			0.0005, 0.0004, 0.0003, 0.0002, 0.0001, 0.00005
		]);
	});

	it('B4: time without a unit stops; percent without a basis asks of what', () => {
		const workbook = book(changed({}, ['Time', 'A (%)', 'B (% of charge)']));
		expect(findingsOf(workbook, 'B4').map((f) => f.message)).toEqual([
			'Column B is in %. Percent of what? We will not assume.',
			'Time column A has no unit. Choose one; we will not assume.'
		]);
	});

	it('B5: a unit in a cell is accepted when it is the column’s, converted when it is not', () => {
		const same = book(changed({ '1,1': '0.4 mol/L' }));
		expect(findingsOf(same, 'B5')[0].message).toBe(
			'"0.4 mol/L" carries its unit, the column\'s own. Read as 0.4?'
		);
		expect(valuesOf(answer(same, { B5: { key: 'accept' } }))?.[1]).toBe(0.4);
		const other = book(changed({ '1,1': '400 mmol/L' }));
		expect(valuesOf(answer(other, { B5: { key: 'convert' } }))?.[1]).toBe(0.4);
		expect(findingsOf(book(changed({ '1,1': '40 g/L' })), 'B5')[0].level).toBe('stop');
	});

	it('B21: percent cells are percent; a mix with plain numbers stops', () => {
		const percent = ROWS.map(([t, a]) => [t, { v: Number(a) * 2, format: '0%' }]);
		const workbook = book([['Time (h)', 'A (% of charge)'], ...percent]);
		expect(valuesOf(answer(workbook, {}))).toEqual([100, 80, 60, 40, 20, 10]);
		const mixed = book([['Time (h)', 'A (% of charge)'], ...percent.map((r, i) => (i === 3 ? [3, 0.4] : r))]);
		expect(summary(findingsOf(mixed, 'B21')[0])).toEqual(['stop', 'B5']);
		expect(valuesOf(answer(mixed, { B21: { key: 'fraction' } }))?.[3]).toBe(40);
		expect(valuesOf(answer(mixed, { B21: { key: 'percent' } }))?.[3]).toBe(0.4);
		const molar = book(changed({ '1,1': { v: 0.4, format: '0%' } }));
		expect(summary(findingsOf(molar, 'B21')[0])).toEqual(['stop', 'B3']);
	});

	it('B22 and B23: area % are recognised; response factors go with them, the areas stay', () => {
		const rows = [
			['Time (h)', 'A (area %)', 'B (area %)'],
			...ROWS.map(([t, a]) => [t, Number(a) * 200, 100 - Number(a) * 200])
		];
		const workbook = book(rows);
		expect(findingsOf(workbook, 'B22')[0].message).toContain('each row sums to 100');
		const { run, massBalance } = answer(workbook, { B22: { key: 'rrf', values: { A: 1, B: '1.6' } } });
		expect(run?.channels[1]).toEqual({
			id: 'B',
			weights: { B: 1 },
			unit: 'area %',
			responseFactor: { value: 1.6, unit: '1' }
		});
		expect(run?.timepoints[1].values).toEqual({ A: 80, B: 20 });
		expect(massBalance).toBeNull();
		const short = book(rows.map((r, i) => (i === 0 ? r : [r[0], Number(r[1]) * 0.9, Number(r[2]) * 0.9])));
		expect(findingsOf(short, 'B23')[0].message).toContain('sum to 90');
		expect(answer(short, { B23: { key: 'scale' } }).run?.timepoints[1].values).toEqual({ A: 80, B: 20 });
		expect(
			answer(workbook, { B22: { key: 'rrf', values: { A: 1, B: -1 } } }).findings.find(
				(f) => f.rule === 'B22'
			)?.problem
		).toContain('greater than zero');
	});

	it('g/L, % w/w and a signal beside an internal standard become mol/L, in words', () => {
		const mass = book([['Time (h)', 'A (g/L)'], ...ROWS.map(([t, a]) => [t, Number(a) * 200])]);
		expect(valuesOf(answer(mass, { B4: { key: 'molar-mass', values: { value: 200 } } }))).toEqual([
			0.5, 0.4, 0.3, 0.2, 0.1, 0.05
		]);
		const weight = book([['Time (h)', 'A (% w/w)'], ...ROWS.map(([t, a]) => [t, Number(a) * 20])]);
		const { run } = settle({
			workbook: weight,
			species: [{ ...species[0], molarMassGPerMol: 200 }],
			mapping: { ...first(weight).mapping, conditions, densityGPerL: 1000 }
		});
		expect(run?.timepoints.map((p) => p.values.A)).toEqual([0.5, 0.4, 0.3, 0.2, 0.1, 0.05]);
		const standard = book([
			['Time (h)', 'A (area)', 'ISTD (area)'],
			...ROWS.map(([t, a]) => [t, Number(a) * 1000, 500])
		]);
		const counted = answer(standard, { B4: { key: 'standard', values: { standard: 0.1, factor: 0.2 } } });
		expect(valuesOf(counted)).toEqual([0.5, 0.4, 0.3, 0.2, 0.1, 0.05]);
		expect(counted.conversions.join()).toContain('signal over that of the internal standard');
	});
});

describe('numbers', () => {
	it('B6: an ambiguous number is shown both ways and asked once for the file', () => {
		const workbook = csv('Time (h);A (mol/L)\n0;5,125\n1;4,250\n2;3,500\n3;2,125\n4;1,250\n');
		const [f] = findingsOf(workbook, 'B6');
		expect([f.level, f.message]).toEqual([
			'ask',
			'"5,125" could be 5125 or 5.125. Nothing else in the file tells which.'
		]);
		expect(valuesOf(answer(workbook, { B6: { key: 'comma' } }))).toEqual([5.125, 4.25, 3.5, 2.125, 1.25]);
		expect(valuesOf(answer(workbook, { B6: { key: 'point' } }))).toEqual([5125, 4250, 3500, 2125, 1250]);
		expect(first(csv('Time (h);A (mol/L)\n0;5,125\n1;0,250\n')).mapping.decimal).toBe(',');
	});

	it('B6: mixed conventions stop, and the cells of the other one are asked singly', () => {
		const workbook = csv('Time (h);A (mol/L)\n0;0.5\n1;0,25\n2;0.125\n3;0.1\n4;0.05\n');
		expect(summary(findingsOf(workbook, 'B6')[0])).toEqual(['stop', 'B2 B4 B5 B6 B3']);
		const settled = answer(workbook, { B6: { key: 'point' } });
		expect(settled.findings.filter((f) => f.open).map((f) => [f.level, f.cells.join()])).toEqual([
			['stop', 'B3']
		]);
	});

	it('B7: no-break spaces, thin spaces, apostrophes and the Unicode minus are read and noted', () => {
		const workbook = book(
			changed({ '0,1': '\u00a00.5', '1,1': '\u22120.001', '2,1': '1\u2009234.5', '3,1': "1'000" })
		);
		const [f] = findingsOf(workbook, 'B7');
		expect([f.level, f.count]).toEqual(['note', 4]);
		expect(valuesOf(answer(workbook, { B20: { key: 'keep' } }))?.slice(0, 4)).toEqual([
			0.5, -0.001, 1234.5, 1000
		]);
	});

	it('B8: a bare <LOQ needs the limit, a stated limit does not', () => {
		const workbook = book(changed({ '4,1': '<LOQ', '5,1': '< 0.02', '0,2': 'BLQ' }));
		expect(findingsOf(workbook, 'B8').map((f) => f.message)).toEqual([
			'What is the LOQ of A? Needed for 1 value.',
			'What is the LOQ of B? Needed for 1 value.'
		]);
		const settled = answer(workbook, { B8: { key: 'limit', values: { loq: '0.01' } } });
		expect(valuesOf(settled)?.slice(4)).toEqual([{ below: 0.01 }, { below: 0.02 }]);
		expect(settled.run?.channels[0].loq).toBe(0.01);
		expect(
			answer(workbook, { B8: { key: 'limit', values: { loq: 0 } } }).findings.find((f) => f.rule === 'B8')
				?.problem
		).toContain('greater than zero');
	});

	it('B9 and B10: n.d. and tr are asked, never guessed', () => {
		const workbook = book(changed({ '0,2': 'n.d.', '5,1': 'tr' }));
		expect(findingsOf(workbook, 'B9')[0].message).toBe('"n.d." in C2: not detected, or not determined?');
		const settled = answer(workbook, {
			B9: { key: 'not-detected', values: { lod: 0.001 } },
			B10: { key: 'between', values: { lod: 0.001, loq: 0.003 } }
		});
		expect([settled.run?.timepoints[0].values.B, settled.run?.timepoints[5].values.A]).toEqual([
			{ below: 0.001 },
			{ below: 0.003 }
		]);
		expect(
			answer(workbook, { B9: { key: 'not-determined' }, B10: { key: 'missing' } }).run?.timepoints[0].values.B
		).toBeNull();
		expect(
			answer(workbook, { B10: { key: 'between', values: { lod: 2, loq: 1 } } }).findings.find(
				(f) => f.rule === 'B10'
			)?.problem
		).toContain('greater than the LOD');
	});

	it('B11: blanks and dashes are missing, never zero; other text is asked; a typed 0 stays 0', () => {
		const workbook = book(changed({ '1,1': null, '2,1': '-', '3,1': 'n/a', '4,1': 'lost vial' }));
		expect(findingsOf(workbook, 'B11').map((f) => [f.level, f.cells.join()])).toEqual([
			['ask', 'B6'],
			['note', 'B4,B5']
		]);
		expect(valuesOf(answer(workbook, { B11: { key: 'missing' } }))).toEqual([
			0.5,
			null,
			null,
			null,
			null,
			0.05
		]);
		const entered = answer(workbook, {
			B11: { key: 'enter', values: { value: '0,1' }, reason: 'From the notebook.' }
		});
		expect(valuesOf(entered)?.[4]).toBe(0.1);
		expect(entered.run?.corrections).toEqual([
			{ sheet: 'Data', cell: 'B6', original: 'lost vial', corrected: '0,1', reason: 'From the notebook.' }
		]);
		const zero = first(book(changed({}))).mapping;
		const columns = zero.columns.map((c) => (c.column === 3 ? { ...c, loq: 0.002 } : c));
		const workbook0 = book(changed({}));
		const offered = settle({ workbook: workbook0, species, mapping: { ...zero, columns, conditions } });
		expect(offered.findings.map((f) => [f.level, f.rule, f.cells.join()])).toEqual([['note', 'B11', 'C2']]);
		expect(offered.run?.timepoints[0].values.B).toBe(0);
		const censored = settle({
			workbook: workbook0,
			species,
			mapping: { ...zero, columns, conditions },
			answers: { [offered.findings[0].id]: { key: 'censor' } }
		});
		expect(censored.run?.timepoints[0].values.B).toEqual({ below: 0.002 });
	});

	it('B12: values above the range are right-censored or missing, as chosen', () => {
		const workbook = book(changed({ '0,1': '>0.45', '1,1': 'saturated' }));
		expect(findingsOf(workbook, 'B12')).toHaveLength(2);
		const settled = answer(workbook, { B12: { key: 'above', values: { value: 0.39 } } });
		expect(valuesOf(settled)?.slice(0, 2)).toEqual([{ above: 0.45 }, { above: 0.39 }]);
	});

	it('B20: negative noise is kept down to −LOQ, below that it is asked', () => {
		const workbook = book(changed({ '5,1': -0.001 }));
		expect(findingsOf(workbook, 'B20')[0].level).toBe('ask');
		const mapping = first(workbook).mapping;
		const columns = mapping.columns.map((c) => (c.column === 2 ? { ...c, loq: 0.002 } : c));
		const settled = settle({ workbook, species, mapping: { ...mapping, columns, conditions } });
		expect([settled.open, valuesOf(settled)?.[5]]).toEqual([0, -0.001]);
	});

	it('B24: a date where a number belongs stops, stored or as text, and is never converted back', () => {
		const workbook = book(changed({ '1,1': { v: 46054, format: 'dd.mm.yyyy' }, '2,2': '1-Feb' }));
		expect(findingsOf(workbook, 'B24').map((f) => [f.level, f.cells.join(), f.found])).toEqual([
			['stop', 'B3', 'a date (01.02.2026)'],
			['stop', 'C4', 'a date (1-Feb)']
		]);
		expect(valuesOf(answer(workbook, { B24: { key: 'enter', values: { value: '1.2' } } }))?.[1]).toBe(1.2);
	});

	it('B25 and B26: error values and formulas without a result stop; results are used and noted', () => {
		const workbook = book(
			changed({ '1,1': { error: '#REF!' }, '2,1': { f: 'B2*2' }, '3,1': { f: '1/5', v: 0.2 } })
		);
		expect(first(workbook).findings.map((f) => [f.level, f.rule, f.cells.join()])).toEqual([
			['stop', 'B25', 'B3'],
			['stop', 'B26', 'B4'],
			['note', 'B26', 'B5']
		]);
		expect(valuesOf(answer(workbook, { B25: { key: 'missing' }, B26: { key: 'missing' } }))).toEqual([
			0.5,
			null,
			null,
			0.2,
			0.1,
			0.05
		]);
	});

	it('B39: text that looks like a formula is text, and asked about like any other', () => {
		const workbook = book(changed({ '1,1': '=1+1', '2,1': '@SUM(A1)' }));
		expect(findingsOf(workbook, 'B11').map((f) => f.found)).toEqual(['"=1+1"', '"@SUM(A1)"']);
	});
});

describe('times', () => {
	const times = (cells: TestCell[], head = 'Time') =>
		book([[head, 'A (mol/L)'], ...cells.map((t, i) => [t, 0.5 - i * 0.05])]);
	const timesOf = (s: ReturnType<typeof settle>) => s.run?.timepoints.map((p) => p.time);

	it('B14: durations are the stored number of days, whatever the display', () => {
		const day = (h: number, format: string): TestCell => ({ v: h / 24, format });
		const workbook = times([
			day(0, '[h]:mm'),
			day(0.25, '[h]:mm'),
			day(1, '[h]:mm'),
			day(2, '[h]:mm'),
			day(25, 'h:mm'),
			day(26, '[h]:mm')
		]);
		expect(findingsOf(workbook, 'B14')[0].message).toBe(
			'A6 is shown as 1:00, stored as 25:00; 25 h is used.'
		);
		expect(timesOf(answer(workbook, {}))).toEqual([0, 0.25, 1, 2, 25, 26]);
	});

	it('B15: times of day need a start and ask at midnight', () => {
		const clock = (h: number, m: number): TestCell => ({ v: (h * 60 + m) / 1440, format: 'hh:mm' });
		const workbook = times(
			[clock(22, 0), clock(23, 0), clock(23, 50), clock(0, 20), clock(2, 0), clock(3, 0)],
			'Uhrzeit'
		);
		const asked = first(workbook).findings.filter((f) => f.rule === 'B15');
		expect(asked.map((f) => f.message)).toEqual([
			'The column holds times of day. When was time zero?',
			'0:20 follows 23:50: next day?'
		]);
		const { tables } = propose(workbook, species);
		const answers = {
			[asked[0].id]: { key: 'start', values: { value: '21:30' } },
			[asked[1].id]: { key: 'next-day' }
		};
		const settled = settle({
			workbook,
			species,
			mapping: {
				...tables[0].mapping,
				conditions: {
					...conditions,
					initial: conditions?.initial ?? {},
					excess: {},
					temperature: { value: 1, unit: 'degC' }
				}
			},
			answers
		});
		expect(timesOf(settled)).toEqual([
			0.5,
			1.5,
			Number((140 / 60).toPrecision(15)),
			Number((170 / 60).toPrecision(15)),
			4.5,
			5.5
		]);
	});

	it('B15: times that begin in the morning are asked: time of day or elapsed', () => {
		const workbook = times(['09:40', '10:10', '10:40', '11:40', '12:40', '13:40']);
		expect(findingsOf(workbook, 'B17').length + findingsOf(workbook, 'B15').length).toBeGreaterThan(0);
		expect(findingsOf(workbook, 'B15')[0].message).toBe(
			'The first time is 09:40. Time of day, or elapsed time?'
		);
	});

	it('B16: date-time stamps are counted as differences, across a clock change by the zone', () => {
		const workbook = times(
			['2026-10-25 00:30', '2026-10-25 01:30', '2026-10-25 04:30', '2026-10-25 05:30', '2026-10-25 06:30'],
			'Date and time'
		);
		const asked = first(workbook).findings.filter((f) => f.rule === 'B16');
		expect(asked.map((f) => f.id)).toEqual(['B16:Data!zone']);
		const mapping = { ...first(workbook).mapping, conditions };
		const settleWith = (zone: Answer) =>
			timesOf(
				settle({
					workbook,
					species,
					mapping,
					answers: { 'B16:Data!zone': zone, 'B16:Data!start': { key: 'first' } }
				})
			);
		// The clocks of central Europe go back from 3:00 to 2:00 on 25 Oct 2026: one hour more has passed.
		expect(settleWith({ key: 'zone', values: { value: 'Europe/Berlin' } })).toEqual([0, 1, 5, 6, 7]);
		expect(settleWith({ key: 'unchanged' })).toEqual([0, 1, 4, 5, 6]);
	});

	it('B16: a stamp in the hour that the clocks showed twice is asked', () => {
		const workbook = times(
			['2026-10-25 01:30', '2026-10-25 02:30', '2026-10-25 03:30', '2026-10-25 04:30', '2026-10-25 05:30'],
			'Timestamp'
		);
		const mapping = { ...first(workbook).mapping, conditions, timeZone: 'Europe/Berlin' };
		const start: Answer = { key: 'first' };
		const open = settle({ workbook, species, mapping, answers: { 'B16:Data!start': start } }).findings.filter(
			(f) => f.open
		);
		expect(open.map((f) => [f.id, f.message])).toEqual([
			[
				'B16:Data!doubled-A3',
				'A3 2026-10-25 02:30: the clocks showed this hour twice. Before or after they were put back?'
			]
		]);
		const settleWith = (key: string) =>
			timesOf(
				settle({
					workbook,
					species,
					mapping,
					answers: { 'B16:Data!start': start, 'B16:Data!doubled-A3': { key } }
				})
			);
		expect(settleWith('before')).toEqual([0, 1, 3, 4, 5]);
		expect(settleWith('after')).toEqual([0, 2, 3, 4, 5]);
	});

	it('B16: a date that reads as day-month or month-day is asked where it matters', () => {
		const workbook = times(
			['03/04/2026 09:00', '03/04/2026 10:00', '03/05/2026 09:00', '03/05/2026 10:00', '03/05/2026 11:00'],
			'Timestamp'
		);
		const mapping = { ...first(workbook).mapping, conditions };
		const settleWith = (key: string) =>
			timesOf(
				settle({
					workbook,
					species,
					mapping,
					answers: {
						'B16:Data!order': { key },
						'B16:Data!zone': { key: 'unchanged' },
						'B16:Data!start': { key: 'first' }
					}
				})
			);
		expect(settleWith('month')).toEqual([0, 1, 24, 25, 26]);
		expect(settleWith('day')).toEqual([0, 1, 720, 721, 722]);
	});

	it('B17: "90 min" in an h column is asked; mixed units and kinds stop', () => {
		const one = times([0, 0.5, 1, '90 min', 2, 3], 'Time (h)');
		expect(summary(findingsOf(one, 'B17')[0])).toEqual(['ask', 'A5']);
		expect(timesOf(answer(one, { B17: { key: 'convert' } }))).toEqual([0, 0.5, 1, 1.5, 2, 3]);
		const mixed = times(['0 min', '30 min', '1 h', '2 h', '1 d']);
		expect(findingsOf(mixed, 'B17')[0].level).toBe('stop');
		expect(timesOf(answer(mixed, { B17: { key: 'convert' } }))).toEqual([0, 0.5, 1, 2, 24]);
		const kinds = times([{ v: 0.5 / 24, format: '[h]:mm' }, 1, 2, 3, 4], 'Time (h)');
		expect(summary(findingsOf(kinds, 'B17')[0])).toEqual(['stop', 'A2']);
	});

	it('B18: a time that goes back stops; it can be entered, left out, kept, or begin a new run', () => {
		const workbook = times([0, 1, 2, 0.3, 4, 5], 'Time (h)');
		const [f] = findingsOf(workbook, 'B18');
		expect([...summary(f)!, f.options.map((o) => o.key)]).toEqual([
			'stop',
			'A5',
			['enter', 'new-run', 'leave-out', 'keep']
		]);
		expect(timesOf(answer(workbook, { B18: { key: 'enter', values: { value: '3' } } }))).toEqual([
			0, 1, 2, 3, 4, 5
		]);
		expect(timesOf(answer(workbook, { B18: { key: 'leave-out' } }))).toEqual([0, 1, 2, 4, 5]);
		expect(timesOf(answer(workbook, { B18: { key: 'new-run' } }))).toEqual([0, 1, 2]);
		expect(answer(workbook, { B18: { key: 'enter', values: { value: 'soon' } } }).findings[0].problem).toBe(
			'"soon" is not a time.'
		);
		const blank = times([0, 1, null, 3, 4, 5], 'Time (h)');
		expect(findingsOf(blank, 'B18')[0].message).toBe('Row 4 has values but no time in A4.');
	});

	it('B37: the 1904 date system is honoured and noted', () => {
		const workbook = book(
			[
				['Time', 'A (mol/L)'],
				...[0, 1, 2, 26, 27].map((h, i) => [{ v: h / 24, format: '[h]:mm' }, 0.5 - i * 0.1])
			],
			{},
			{ date1904: true }
		);
		expect(first(workbook).findings.map((f) => [f.level, f.rule])).toEqual([['note', 'B37']]);
		expect(timesOf(answer(workbook, {}))).toEqual([0, 1, 2, 26, 27]);
	});

	it('reads header words of several languages', () => {
		for (const head of [
			'Zeit (min)',
			'temps / min',
			'Tiempo [min]',
			'tempo, min',
			'Elapsed time (min)',
			't in min',
			'min',
			'Reaktionszeit [min]',
			'Durée (min)'
		])
			expect([head, first(times([0, 1, 2, 3, 4], head))?.mapping.columns[0]]).toEqual([
				head,
				expect.objectContaining({ role: 'time', unit: 'min' })
			]);
		const retention = book([['RT (min)', 'Time (h)', 'A (mol/L)'], ...ROWS.map(([t, a]) => [7.5, t, a])]);
		expect(first(retention).mapping.columns.map((c) => c.role)).toEqual(['ignore', 'time', 'species']);
	});
});

describe('layouts met in labs', () => {
	it('conditions above, units in a second row, a comma file in German', () => {
		const text =
			'Reaktion HX-14;;;\nAnsatz;RS-112;;\nDatum;12.11.2026;;\nTemperatur;50 °C;;\n;;;\nProbe;Zeit;HX-14;HX-14b\n;[min];[Fl.-%];[Fl.-%]\n' +
			'P1;0;99,8;0,2\nP2;15;80,2;19,8\nP3;30;65,1;34,9\nP4;60;44,0;56,0\nP5;120;20,1;79,9\nMittelwert;;61,8;38,2\n';
		const table = first(csv(text));
		expect([table.range, table.headerRows, table.mapping.decimal]).toEqual(['A8:D12', [6, 7], ',']);
		expect(table.columns.map((c) => [c.role, c.unit, c.species])).toEqual([
			['sample', null, null],
			['time', 'min', null],
			['species', 'area %', 'A'],
			['species', 'area %', 'B']
		]);
		expect(table.suggested).toEqual({
			temperature: { value: 50, unit: 'degC', source: 'A4' },
			initial: { A: { value: 99.8, unit: '%', source: 'C8' } }
		});
	});

	it('an instrument’s list with the time in the sample name', () => {
		const rows = [0, 15, 30].flatMap((t, i) => [
			`${i}\tt=${t} min\tA\t3.1\t${1000 - t * 10}`,
			`${i}\tt=${t} min\tB\t4.2\t${t * 10}`
		]);
		const table = first(
			csv(`Sequence report\nMethod\tX\n\nInj #\tSample Name\tPeak\tRT\tArea\n${rows.join('\n')}\n`)
		);
		expect(table.mapping.columns.map((c) => c.role)).toEqual([
			'injection',
			'time',
			'peak',
			'ignore',
			'value'
		]);
		expect(table.findings.map((f) => f.rule)).toContain('B1');
	});

	it('elapsed time is taken before the time of day and the date', () => {
		const day = { v: 46000, format: 'dd.mm.yyyy' };
		const rows = [
			['Date', 'Time of day', 'Elapsed (min)', 'A (mol/L)'],
			...ROWS.map(([t, a]) => [day, { v: 0.4 + Number(t) / 24, format: 'hh:mm' }, Number(t) * 60, a])
		];
		const table = first(book(rows));
		expect(table.mapping.columns.map((c) => c.role)).toEqual(['ignore', 'ignore', 'time', 'species']);
		expect(table.findings).toEqual([]);
	});

	it('sums, comments and counters are left aside; a conversion is asked about', () => {
		const rows = [
			['No.', 'Time [h]', 'A [mmol/L]', 'B [mmol/L]', 'Sum', 'Conversion %', 'Comment'],
			...ROWS.map(([t, a, b], i) => [i, t, a, b, 0.5, 10, 'x'])
		];
		const table = first(book(rows));
		expect(table.mapping.columns.map((c) => c.role)).toEqual([
			'ignore',
			'time',
			'species',
			'species',
			'ignore',
			'species',
			'ignore'
		]);
		expect(table.findings.filter((f) => f.open).map((f) => f.rule)).toEqual(['B32']);
	});

	it('times across the top are recognised, with the way out', () => {
		const proposal = propose(
			csv('Time (h),0,1,2,4\nA (mol/L),0.5,0.4,0.3,0.2\nB (mol/L),0,0.1,0.2,0.3\n'),
			species
		);
		expect(proposal.findings[0].message).toContain('paste it transposed');
	});
});

describe('replicates and the run as a whole', () => {
	const twice = (extra: TestCell[] = [], head: TestCell[] = []) => [
		[...HEAD, ...head],
		...ROWS.slice(0, 2).map((r) => [...r, ...extra]),
		[1, 0.42, 0.08, ...extra],
		...ROWS.slice(2).map((r) => [...r, ...extra])
	];

	it('B19: equal times without a name are asked; injections are averaged and their spread kept', () => {
		const workbook = book(twice());
		expect(findingsOf(workbook, 'B19')[0].message).toBe(
			'Two rows at 1: injections of one sample, or two samples?'
		);
		expect(valuesOf(answer(workbook, { B19: { key: 'samples' } }))).toHaveLength(7);
		const averaged = answer(workbook, { B19: { key: 'injections' } });
		expect(valuesOf(averaged)?.slice(0, 3)).toEqual([0.5, expect.closeTo(0.41, 12), 0.3]);
		expect(averaged.conversions.join()).toContain('spread A ±0.0141421');
		expect(averaged.run?.replicates).toBe('injections');
	});

	it('B13: with one sample name for both it is the same question; different names answer it', () => {
		const named = (ids: string[]) => book(twice().map((row, i) => [...row, i === 0 ? 'Sample' : ids[i - 1]]));
		expect(findingsOf(named(['1', '2', '2', '3', '4', '5', '6']), 'B13')).toHaveLength(1);
		const apart = named(['1', '2', '3', '4', '5', '6', '7']);
		expect(first(apart).findings).toEqual([]);
		expect(answer(apart, {}).run?.replicates).toBe('samples');
	});

	it('B33: without a row at time zero the charge is asked', () => {
		const workbook = book([HEAD, ...ROWS.slice(1)]);
		const [f] = findingsOf(workbook, 'B33');
		expect([f.level, f.options.map((o) => o.key)]).toEqual(['ask', ['charge', 'fit']]);
		const none = { conditions: { temperature: { value: 50, unit: 'degC' }, initial: {}, excess: {} } };
		expect(answer(workbook, { B33: { key: 'fit', values: { species: 'A' } } }, none).run?.initial).toEqual({
			A: { fit: true }
		});
	});

	it('B34: fewer values than constants stop, fewer than five times are noted', () => {
		const workbook = book([['Time (h)', 'A (mol/L)'], ...ROWS.slice(0, 3).map((r) => r.slice(0, 2))]);
		expect(findingsOf(workbook, 'B34').map((f) => f.level)).toEqual(['note']);
		const settled = settle({
			workbook,
			species,
			mapping: { ...first(workbook).mapping, conditions },
			parameters: 4
		});
		expect(settled.findings[0]).toMatchObject({ rule: 'B34', level: 'stop', open: true });
	});

	it('B35: columns that look copied are noted', () => {
		const same = book([HEAD, ...ROWS.map(([t, a]) => [t, a, a])]);
		expect(findingsOf(same, 'B35')[0].message).toContain('hold the same values throughout');
		const flat = book([HEAD, ...ROWS.map(([t, a]) => [t, a, 0.1])]);
		expect(findingsOf(flat, 'B35')[0].message).toContain('are 0.1');
	});

	it('B36: rows outside 95 to 105 % and a trend are noted, with slope and interval', () => {
		const ab = species.slice(0, 2);
		const workbook = book([HEAD, ...ROWS.map(([t, a, b]) => [t, a, Number(b) * 0.8])]);
		const { findings, massBalance } = settle({
			workbook,
			species: ab,
			mapping: { ...first(workbook, ab).mapping, conditions }
		});
		expect(findings.map((f) => f.id)).toEqual(['B36:Data!rows', 'B36:Data!trend']);
		// 20 % of what has formed is not seen: −4 % at 1 h to −18 % at 5 h.
		expect(massBalance?.rows.map((r) => r.percent)).toEqual([100, 96, 92, 88, 84, 82]);
		expect(massBalance?.slope?.value).toBeCloseTo(-3.714286, 5);
		expect(massBalance?.slope?.high).toBeLessThan(0);
		expect(findings[1].message).toContain('A species that is not seen');
	});

	it('A7: a temperature far from the rest of the log is pointed out, and the log goes into the run', () => {
		const workbook = book([
			[...HEAD, 'T (°C)'],
			...ROWS.map((r, i) => [...r, i === 3 ? 57.3 : 50 + i * 0.1])
		]);
		expect(summary(findingsOf(workbook, 'A7')[0])).toEqual(['note', 'D5']);
		expect(answer(workbook, {}).run?.temperatureLog?.[3]).toEqual({ time: 3, celsius: 57.3 });
	});

	it('the long layout, one row a peak, becomes samples; unknown peaks are asked', () => {
		const rows: TestCell[][] = [['Sample', 'Time (h)', 'Peak', 'RT (min)', 'Area %']];
		[100, 80, 60, 40, 20].forEach((a, i) => {
			rows.push(
				[`S${i}`, i, 'A', 3.1, a - 1],
				[`S${i}`, i, 'B', 4.2, 100 - a],
				[`S${i}`, i, 'RRT 0.87', 3.6, 1]
			);
		});
		const workbook = book(rows);
		const table = first(workbook);
		expect([table.mapping.layout, table.peaks?.map((p) => [p.peak, p.values, p.species])]).toEqual([
			'long',
			[
				['A', 5, 'A'],
				['B', 5, 'B'],
				['RRT 0.87', 5, null]
			]
		]);
		const settled = answer(workbook, {
			B32: { key: 'species', values: { value: 'C' } },
			B22: { key: 'uncorrected' }
		});
		expect(settled.run?.timepoints.map((p) => p.values)).toEqual(
			[100, 80, 60, 40, 20].map((a) => ({ A: a - 1, B: 100 - a, C: 1 }))
		);
		expect(settled.run?.timepoints[1].source).toEqual({
			sheet: 'Data',
			row: 5,
			cells: { A: 'E5', B: 'E6', C: 'E7' }
		});
	});
});

describe('answers, corrections and saved mappings', () => {
	it('an answer that lacks its value, or fits no option, leaves the question open and says why', () => {
		const workbook = book(changed({ '4,1': '<LOQ' }));
		const mapping = { ...first(workbook).mapping, conditions };
		const [f] = findingsOf(workbook, 'B8');
		const problem = (a: Answer) => settle({ workbook, species, mapping, answers: { [f.id]: a } }).findings[0];
		expect(problem({ key: 'limit' })).toMatchObject({ open: true, problem: 'LOQ is missing.' });
		expect(problem({ key: 'limit', values: { loq: 'low' } })).toMatchObject({
			open: true,
			problem: '"low" is not a number.'
		});
		expect(problem({ key: 'guess' }).problem).toContain('no longer fits');
	});

	it('a corrected cell is an overlay: it is used, listed with its original, and the sheet stays', () => {
		const workbook = book(changed({}));
		const before = JSON.stringify(workbook);
		const correction = {
			sheet: 'Data',
			cell: 'B3',
			original: '0.4',
			corrected: '0.41',
			reason: 'Transcription error.'
		};
		const settled = answer(workbook, {}, {}, [correction]);
		expect(valuesOf(settled)?.[1]).toBe(0.41);
		expect(settled.run?.corrections).toEqual([correction]);
		expect(JSON.stringify(workbook)).toBe(before);
	});

	it('without temperature and charge there is no run, and what is needed is said', () => {
		const workbook = book(changed({}));
		const { needs, run, open } = settle({ workbook, species, mapping: first(workbook).mapping });
		expect([open, run, needs.map((n) => n.field)]).toEqual([0, null, ['temperature', 'initial']]);
	});

	it('a saved mapping is applied where every header matches exactly, and nowhere else', () => {
		const workbook = book(changed({}, ['Time (h)', 'A (mol/L)', 'RRT 0.87']));
		const table = first(workbook);
		const mapping = {
			...table.mapping,
			columns: table.mapping.columns.map((c) =>
				c.column === 3 ? { ...c, weights: { B: 1 }, unit: 'mol/L' } : c
			)
		};
		const saved = [toSavedMapping('house method', table, mapping)];
		const again = propose(workbook, species, { saved }).tables[0];
		expect([again.savedMapping, again.findings]).toEqual(['house method', []]);
		const other = book(changed({}, ['Time (h)', 'A (mol/L)', 'RRT 0.88']));
		expect(propose(other, species, { saved }).tables[0].savedMapping).toBeUndefined();
	});

	it('what the sheet says of temperature, charge and limits is offered with its place', () => {
		const workbook = book([
			['Run 7 at 45 °C'],
			['Charge', 'A 0,500 mol/L'],
			[],
			...changed({}),
			['LOQ 2.0 mmol/L; LOD 0.6 mmol/L']
		]);
		expect(first(workbook).suggested).toEqual({
			temperature: { value: 45, unit: 'degC', source: '"Run 7 at 45 °C"' },
			initial: { A: { value: 0.5, unit: 'mol/L', source: 'A2' } },
			loq: { value: 2, unit: 'mmol/L', source: 'A11' },
			lod: { value: 0.6, unit: 'mmol/L', source: 'A11' }
		});
	});
});
