/** Sheets as instruments, offices and contract laboratories send them (all invented): what is proposed, and what is asked before anything counts. */
import { describe, expect, it } from 'vitest';
import {
	answer,
	book,
	csv,
	first,
	notesIn as notes,
	openIn as open,
	rolesOf as roles,
	timesOf,
	valuesOf
} from '../server/sheets/reading/test-tables';
import type { TestCell } from '../server/sheets/reading/test-workbook';

const T = [0, 1, 2, 4, 8];
const A = [0.5, 0.4, 0.3, 0.2, 0.1];

describe('lists of a chromatography system', () => {
	const list = csv(
		'Sequenzbericht;;;;;\nMethode;HX14_rev3;;;;\nErstellt;12.11.2026 14:03;;;;\n;;;;;\n' +
			'Probenname;Inj.-Nr.;Peakname;Ret.-Zeit [min];Fläche [mAU*s];Fläche-%\n' +
			[0, 30, 60, 120, 240]
				.flatMap((t, i) => [
					`RS-112_t=${t} min;1;HX-14;7,31;${10 - i}.234,5;${95 - 15 * i},5`,
					`RS-112_t=${t} min;1;HX-14b;9,02;${1 + i}.039,1;${4 + 15 * i},5`
				])
				.join('\n')
	);

	it('with the time inside the sample name are read by it, and that is asked with an example', () => {
		const table = first(list);
		expect([table.mapping.layout, table.mapping.decimal, table.peaks?.map((p) => p.species)]).toEqual([
			'long',
			',',
			['A', 'B']
		]);
		expect(table.findings.find((f) => f.rule === 'B1')?.message).toContain(
			'times read from the names in column A, "RS-112_t=0 min" as 0 min'
		);
		const settled = answer(list, { B1: { key: 'right' }, B22: { key: 'uncorrected' } });
		expect(timesOf(settled)).toEqual([0, 30, 60, 120, 240]);
		expect(settled.run?.timeUnit).toBe('min');
		expect(valuesOf(settled)).toEqual([95.5, 80.5, 65.5, 50.5, 35.5]);
	});

	it('with names such as "IPC T0", "IPC 30 min", "IPC 2h" and one without a time ask for that one', () => {
		const rows: TestCell[][] = [
			['Sample', 'A (area %)', 'B (area %)'],
			['IPC T0', 99, 1],
			['IPC 30 min', 80, 20],
			['IPC 1 h', 62, 38],
			['IPC 2h', 40, 60],
			['IPC 4h', 15, 85],
			['EOR', 2, 98]
		];
		expect(open(book(rows))).toEqual(['B18 A7', 'B17 A2', 'B1 A2', 'B22 B1']);
		const settled = answer(book(rows), {
			B1: { key: 'right' },
			B17: { key: 'convert' },
			B18: { key: 'leave-out' },
			B22: { key: 'uncorrected' }
		});
		expect(timesOf(settled)).toEqual([0, 0.5, 1, 2, 4]);
	});

	it('names of samples are no times where a column is headed as time', () => {
		const rows = T.map((t, i): TestCell[] => [`QX 2 h no. ${i}, 5 min`, t, A[i]]);
		expect(timesOf(answer(book([['Sample', 'Time (h)', 'A (mol/L)'], ...rows]), {}))).toEqual(T);
	});

	it('peaks by relative retention time: the named one is matched, the others are asked', () => {
		const workbook = book([
			['Sample ID', 'Time', 'RRT 0.87', 'HX-14 (RRT 1.00)', 'RRT 1.21', 'Total'],
			[null, 'h', 'area %', 'area %', 'area %', 'area %'],
			...T.map((t, i): TestCell[] => [`S${i}`, t, i, 99 - i * 2, 1 + i, 100])
		]);
		expect(roles(workbook).map(([role, , id]) => [role, id])).toEqual([
			['sample', null],
			['time', null],
			['species', null],
			['species', 'A'],
			['species', null],
			['ignore', null]
		]);
		expect(open(workbook)).toEqual(['B32 C2', 'B32 E2']);
	});
});

describe('means and spreads', () => {
	it('columns of means are read, columns of their scatter are shown and no weights', () => {
		for (const spread of ['A SD', 'A stdev [mol/L]', 'A %RSD', '±', 'A ± ']) {
			const workbook = book([
				['Time (h)', 'A mean (mol/L)', spread, 'n'],
				...T.map((t, i): TestCell[] => [t, A[i], 0.01, 3])
			]);
			expect(roles(workbook).map(([role, , id]) => [role, id])).toEqual([
				['time', null],
				['species', 'A'],
				['ignore', null],
				['ignore', null]
			]);
			expect(notes(workbook)).toEqual([
				'Column C holds the scatter of values; shown, and not used as weights.'
			]);
			expect(valuesOf(answer(workbook, {}))).toEqual(A);
		}
	});

	it('rows of means between the samples are left out, and the samples below them are not lost', () => {
		const workbook = book([
			['Time (h)', 'Sample', 'Inj', 'A (mol/L)'],
			...T.flatMap((t, i): TestCell[][] => [
				[t, `S${i}`, 1, A[i]],
				[t, `S${i}`, 2, A[i] + 0.02],
				['Mean', null, null, A[i] + 0.01],
				['RSD %', null, null, 1.2]
			])
		]);
		expect(first(workbook).range).toBe('A2:D19');
		expect(notes(workbook).join('\n')).toContain(
			'Rows 4, 5, 8, 9, 12, 13, 16, 17 between the samples ("Mean", "RSD %") are shown and not used.'
		);
		expect(valuesOf(answer(workbook, {}))?.map((v) => Number(v).toFixed(2))).toEqual([
			'0.51',
			'0.41',
			'0.31',
			'0.21',
			'0.11'
		]);
	});

	it('rows called "Mean" in the sample column carry a time and are asked about', () => {
		const workbook = book([
			['Time (h)', 'Sample', 'A (mol/L)'],
			...T.flatMap((t, i): TestCell[][] => [
				[t, `S${i}-1`, A[i]],
				[t, `S${i}-2`, A[i]],
				[t, 'Mean', A[i]]
			])
		]);
		expect(open(workbook)).toEqual(['B27 B4']);
		expect(timesOf(answer(workbook, { B27: { key: 'leave-out' } }))).toHaveLength(10);
	});

	it('samples called R1, R2 are not taken for a coefficient of determination', () => {
		const rows = T.map((t, i): TestCell[] => [`R${i + 1}`, t, A[i]]);
		expect(timesOf(answer(book([['Sample', 'Time (h)', 'A (mol/L)'], ...rows]), {}))).toEqual(T);
	});

	it('a list whose units stand in a column of their own: the common one counts, any other is asked (B5)', () => {
		const rows = T.flatMap((t, i): TestCell[][] => [
			[t, 'HX-14', i === 2 ? A[i] * 1000 : A[i], i === 2 ? 'mmol/L' : 'mol/L'],
			[t, 'HX-14b', 0.1, 'mol/L']
		]);
		const workbook = book([['Time (h)', 'Compound', 'Amount', 'Unit'], ...rows]);
		expect(first(workbook).mapping.columns.map((c) => [c.role, c.unit])).toEqual([
			['time', 'h'],
			['peak', null],
			['value', 'mol/L'],
			['ignore', null]
		]);
		expect(open(workbook)).toEqual(['B5 C6']);
		expect(valuesOf(answer(workbook, { B5: { key: 'convert' } }))).toEqual(A);
	});

	it('a list that writes sample and time once, with limits alone in a row, is found whole', () => {
		const list = T.map(
			(t, i) => `S${i};${t};HX-14;${500 - i * 90}\n;;HX-14b;${i === 0 ? '<LOQ' : i * 88}\n`
		).join('');
		const table = first(csv(`Sample;Time (h);Compound;Conc. (mmol/L)\n${list}`));
		expect([table.range, table.mapping.layout]).toEqual(['A2:D11', 'long']);
		const workbook = csv(`Sample;Time (h);Compound;Conc. (mmol/L)\n${list}`);
		const settled = answer(workbook, { B8: { key: 'limit', values: { loq: 2 } } });
		expect(settled.run?.timepoints.map((p) => p.values.B)[0]).toEqual({ below: 0.002 });
		expect(timesOf(settled)).toEqual(T);
	});
});
