/** Times across the top, one row a species: read on the turned sheet, asked, and told with the addresses of the sheet as received. */
import { describe, expect, it } from 'vitest';
import { book, conditions, csv, findingsOf, first, species } from '../server/sheets/reading/test-tables';
import type { TestCell } from '../server/sheets/reading/test-workbook';
import type { Answers } from '../schemas/sheet';
import { mappingSchema, savedMappingSchema } from '../schemas/sheet';
import { propose, proposeBlock, settle, timeForm, toSavedMapping } from './index';

const TABLE: TestCell[][] = [
	['Run 7 at 45 °C'],
	['Charge', 'A 0,500 mol/L'],
	[],
	['Time (h)', 0, 1, 2, 4, 8],
	['A (mol/L)', 0.5, 0.4, 0.3, '<LOQ', 0.1],
	['B (mol/L)', 0, 0.1, 'n.d.', 0.3, 0.4],
	['T (°C)', 45, 45.1, 44.9, 45, 58],
	['LOQ 2.0 mmol/L']
];

const settled = (rows: TestCell[][], byRule: Record<string, Answers[string]>) => {
	const workbook = book(rows);
	const mapping = mappingSchema.parse({ ...first(workbook).mapping, conditions });
	const { findings } = settle({ workbook, species, mapping });
	const answers = Object.fromEntries(
		findings.flatMap((f) => (f.open && byRule[f.rule] ? [[f.id, byRule[f.rule]]] : []))
	);
	return settle({ workbook, species, mapping, answers });
};
const YES = { B1: { key: 'right' } };

describe('a table with the times across the top', () => {
	it('is proposed as rows of series, with its block, its rows and its conditions as they lie on the sheet', () => {
		const table = first(book(TABLE));
		expect([table.range, table.block, table.title]).toEqual([
			'B4:F7',
			{ firstRow: 4, lastRow: 7, firstColumn: 2, lastColumn: 6 },
			'Run 7 at 45 °C'
		]);
		expect(table.rows?.map((r) => [r.row, r.header, r.role, r.unit, r.species])).toEqual([
			[4, 'Time (h)', 'time', 'h', null],
			[5, 'A (mol/L)', 'species', 'mol/L', 'A'],
			[6, 'B (mol/L)', 'species', 'mol/L', 'B'],
			[7, 'T (°C)', 'temperature', 'degC', null]
		]);
		expect([table.mapping.columns, table.mapping.across?.headerColumns]).toEqual([[], [1]]);
		expect(table.suggested).toEqual({
			temperature: { value: 45, unit: 'degC', source: '"Run 7 at 45 °C"' },
			initial: { A: { value: 0.5, unit: 'mol/L', source: 'A2' } },
			loq: { value: 2, unit: 'mmol/L', source: 'A8' }
		});
	});

	it('is read only when a person says so, and every finding names the true cell', () => {
		const open = findingsOf(book(TABLE), 'B1');
		expect(open.map((f) => [f.level, f.open, f.cells])).toEqual([['ask', true, ['A4', 'F7']]]);
		expect(open[0].message).toBe(
			'Times run across row 4 of "Data". Read each row of B4:F7 as a species and each column as a sample?'
		);
		const { findings } = first(book(TABLE));
		expect(findings.map((f) => [f.rule, f.cells.join()])).toEqual([
			['B1', 'A4,F7'],
			['B8', 'E5'],
			['B9', 'D6'],
			['B11', 'B6'],
			['A7', 'F7']
		]);
	});

	it('becomes a run whose values carry their cells', () => {
		const { run } = settled(TABLE, {
			...YES,
			B8: { key: 'limit', values: { loq: 0.002 } },
			B9: { key: 'not-determined' }
		});
		expect(run?.timepoints.map((p) => [p.time, p.values.A, p.values.B])).toEqual([
			[0, 0.5, 0],
			[1, 0.4, 0.1],
			[2, 0.3, null],
			[4, { below: 0.002 }, 0.3],
			[8, 0.1, 0.4]
		]);
		expect(run?.timepoints[3].source).toEqual({
			sheet: 'Data',
			row: 4,
			column: 5,
			cells: { A: 'E5', B: 'E6' }
		});
		expect(run?.temperatureLog?.[4]).toEqual({ time: 8, celsius: 58 });
	});

	it('takes corrections at the true cell, by hand and as answers', () => {
		const rows = TABLE.slice(3, 6).map((row) => [...row]);
		rows[1][4] = 0.2;
		rows[2][3] = 0.2;
		rows[0][3] = 0.2;
		const workbook = book(rows);
		const mapping = { ...first(workbook).mapping, conditions };
		const correction = {
			sheet: 'Data',
			cell: 'C2',
			original: '0.4',
			corrected: '0.41',
			reason: 'Typing error.'
		};
		const ask = settle({ workbook, species, mapping });
		expect(ask.findings.find((f) => f.rule === 'B18')).toMatchObject({
			cells: ['D1'],
			message: expect.stringContaining('D1 0.2 comes after 1') as string
		});
		const { run } = settle({
			workbook,
			species,
			mapping,
			corrections: [correction],
			answers: {
				[ask.findings.find((f) => f.rule === 'B1')?.id ?? '']: { key: 'right' },
				'B18:Data!D1': { key: 'enter', values: { value: '2' }, reason: 'typed with a shift' }
			}
		});
		expect(run?.timepoints.map((p) => [p.time, p.values.A])).toEqual([
			[0, 0.5],
			[1, 0.41],
			[2, 0.3],
			[4, 0.2],
			[8, 0.1]
		]);
		expect(run?.corrections?.map((c) => [c.cell, c.original, c.corrected])).toEqual([
			['C2', '0.4', '0.41'],
			['D1', '0.2', '2']
		]);
	});

	it('speaks of rows where a column would be meant, and of columns where rows would be', () => {
		const rows: TestCell[][] = [
			['Time', 0, 1, 2, 4, 8],
			['A', 0.5, 0.4, 0.3, 0.2, 0.1],
			['RRT 0.87 (mol/L)', 0, 0.1, 0.2, 0.3, 0.4]
		];
		const table = first(book(rows, { hiddenColumns: [3], hiddenRows: [3] }));
		const text = table.findings.map((f) => f.message).join('\n');
		for (const part of [
			'Time row 1 has no unit.',
			'Row 2 has no unit.',
			'Column C of "Data" is hidden.',
			'Row 3 of "Data" is hidden.',
			'Row 3, "RRT 0.87 (mol/L)", is no species of the scheme.'
		])
			expect(text).toContain(part);
	});

	it('is found with units in a column of their own, with times that carry their unit, and twice on a sheet', () => {
		const units = first(
			book([
				['Sample', null, 'S1', 'S2', 'S3', 'S4'],
				['Time', 'min', 0, 15, 30, 60],
				['A', 'mmol/L', 500, 400, 300, 200],
				['B', 'mmol/L', 'n.d.', 'n.d.', 'n.d.', 'n.d.'],
				['C', 'mmol/L', 1, 2, 3, 4]
			])
		);
		expect(units.rows?.map((r) => [r.header, r.role, r.unit])).toEqual([
			['Sample', 'sample', null],
			['Time / min', 'time', 'min'],
			['A / mmol/L', 'species', 'mmol/L'],
			['B / mmol/L', 'species', 'mmol/L'],
			['C / mmol/L', 'species', 'mmol/L']
		]);
		const carried = book([
			['Species', '0 h', '1 h', '2 h', '4 h'],
			['A (mol/L)', 0.5, 0.4, 0.3, 0.2]
		]);
		expect(timeForm(carried, first(carried).mapping)).toBe('unit in the cells');
		const twice = propose(
			csv('Run 1\nTime (h),0,1,2\nA (mol/L),0.5,0.4,0.3\n\n\nRun 2\nTime (h),0,1,3\nA (mol/L),0.5,0.3,0.1\n'),
			species
		);
		expect(twice.tables.map((t) => [t.range, t.title])).toEqual([
			['B2:D3', 'Run 1'],
			['B7:D8', 'Run 2']
		]);
	});

	it('is told from a table whose columns are compounds with numbers for names', () => {
		const table = first(
			book([
				['Time (h)', 1, 2, 3],
				[0, 0.5, 0, 0],
				[1, 0.4, 0.1, 0],
				[2, 0.3, 0.15, 0.05]
			])
		);
		expect([table.range, table.mapping.across]).toEqual(['A2:D4', undefined]);
	});

	it('can be drawn by hand, and its mapping is kept for rows with the same names', () => {
		const workbook = book(TABLE);
		const drawn = proposeBlock(workbook, species, 'Data', {
			firstRow: 4,
			lastRow: 6,
			firstColumn: 1,
			lastColumn: 5
		});
		expect([drawn?.range, drawn?.rows?.map((r) => r.row)]).toEqual(['B4:E6', [4, 5, 6]]);
		const table = first(workbook);
		const saved = [savedMappingSchema.parse(toSavedMapping('across', table, table.mapping))];
		expect(saved[0].headers).toEqual(['Time (h)', 'A (mol/L)', 'B (mol/L)', 'T (°C)']);
		expect(propose(workbook, species, { saved }).tables[0].savedMapping).toBe('across');
		const upright = book([
			['Time (h)', 'A (mol/L)', 'B (mol/L)', 'T (°C)'],
			[0, 0.5, 0, 45],
			[1, 0.4, 0.1, 45]
		]);
		expect(propose(upright, species, { saved }).tables[0].savedMapping).toBeUndefined();
	});

	it('a block moved by hand keeps only the rows and columns that lie in it', () => {
		const workbook = book(TABLE);
		const mapping = { ...first(workbook).mapping, conditions };
		const block = { firstRow: 4, lastRow: 5, firstColumn: 2, lastColumn: 4 };
		const { mapping: after, preview } = settle({ workbook, species, mapping: { ...mapping, block } });
		expect(after.across?.rows.map((r) => r.row)).toEqual([4, 5]);
		expect(preview.map((p) => p.time)).toEqual([0, 1, 2]);
	});
});
