/**
 * The messy workbook of an invented reaction, HX-14, through the reader. Counts and constants are those of the story that the file
 * was made for; the constants are recomputed by the fit.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { fit } from '../kinetics/fit';
import { fitRequest } from '../schemas/fit';
import { runContent } from '../schemas/run';
import {
	mappingSchema,
	proposalSchema,
	settlementSchema,
	type Answers,
	type Mapping
} from '../schemas/sheet';
import { readBytes } from '../server/sheets/reading/read';
import { propose, settle } from './index';

const read = (name: string) =>
	readBytes(readFileSync(new URL(`../../../tests/fixtures/${name}`, import.meta.url)), name);

const species = [
	{ id: 'A', name: 'HX-14', role: 'starting material' as const, molarMassGPerMol: 214.2 },
	{ id: 'B', name: 'HX-14b', role: 'intermediate' as const },
	{ id: 'C', name: 'lactone', role: 'product' as const }
];
const at50 = {
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	excess: {}
};
const withConditions = (
	mapping: Mapping,
	conditions: NonNullable<Mapping['conditions']> = at50
): Mapping => ({ ...mapping, conditions });
const k = (guess: number) => ({ kRef: { value: guess, unit: '1/h' } });
const steps = [
	{ id: 's1', reactant: 'A', products: [{ species: 'B', coefficient: 1 }], forward: k(0.5), reverse: null },
	{ id: 's2', reactant: 'B', products: [{ species: 'C', coefficient: 1 }], forward: k(0.2), reverse: k(0.1) }
];
const scheme = { species, steps, referenceTemperature: { value: 50, unit: 'degC' } };

describe('s02, a messy workbook', () => {
	const workbook = read('s02_messy.xlsx');
	const proposal = propose(workbook, species);
	const [table, second] = proposal.tables;
	const byRule = (rule: string) => table.findings.filter((f) => f.rule === rule);

	it('finds rows 6 to 20 and the second run below, and mentions the hidden sheet', () => {
		expect(proposalSchema.parse(proposal)).toEqual(proposal);
		expect([table.range, second.range, second.title]).toEqual(['A6:H20', 'A28:B30', 'Run 3 - 60 °C']);
		expect(table.footerRows.map((f) => f.row)).toEqual([21, 22, 23, 24]);
		expect(proposal.findings.map((f) => [f.level, f.rule, f.sheet])).toEqual([['note', 'B29', 'calc']]);
		expect(proposal.sheets.find((s) => s.name === 'Notes')?.tables).toEqual([]);
	});

	it('joins the headers and reads time as a duration', () => {
		expect(table.columns.map((c) => [c.letter, c.header, c.role, c.unit])).toEqual([
			['A', 'Zeit / time / [h:mm]', 'time', null],
			['B', 'Area % / A', 'species', 'area %'],
			['C', 'Area % / B', 'species', 'area %'],
			['D', 'Area % / C', 'species', 'area %'],
			['E', 'Concentration (mmol/L) / A', 'species', 'mmol/L'],
			['F', 'Concentration (mmol/L) / B', 'species', 'mmol/L'],
			['G', 'Concentration (mmol/L) / C', 'species', 'mmol/L'],
			['H', 'T (°C)', 'temperature', 'degC']
		]);
	});

	it('stops at the time typed the wrong way round and at the date, and nowhere else', () => {
		expect(table.findings.filter((f) => f.level === 'stop').map((f) => [f.rule, f.cells])).toEqual([
			['B18', ['A14']],
			['B24', ['F20']]
		]);
		expect(byRule('B18')[0].message).toContain('0:03 comes after 2:00');
		expect(byRule('B18')[0].options[0].needsValue?.[0].suggested).toBe('3:00');
	});

	it('asks seven questions with their cells', () => {
		expect(table.findings.filter((f) => f.level === 'ask').map((f) => [f.rule, f.cells.join(' ')])).toEqual([
			['B1', 'A6 H20'],
			['B3', 'B5 C5 D5 E5 F5 G5'],
			['B8', 'E17 E20'],
			['B5', 'F13'],
			['B9', 'F6 G6'],
			['B10', 'E19'],
			['B19', 'A9 A10']
		]);
	});

	it('offers the limits of the footer with their cell, and never uses them by itself', () => {
		expect(byRule('B8')[0].options[0].needsValue?.[0]).toMatchObject({
			suggested: 2,
			source: 'A23',
			unit: 'mmol/L'
		});
		expect(byRule('B9')[0].options[0].needsValue?.[0]).toMatchObject({ suggested: 0.6, source: 'A23' });
		expect(byRule('B8')[0].open).toBe(true);
	});

	it('notes the text number, the 25 h, the error below the data and the temperature of 57.3 °C', () => {
		expect(byRule('B7')[0].message).toContain('"401,0" as 401');
		expect(byRule('B14')[0].message).toContain('25 h is used');
		expect(byRule('B25')[0].cells).toEqual(['E22']);
		expect(byRule('A7')[0].cells).toEqual(['H15']);
		expect(byRule('A7')[0].found).toBe('57.3 °C');
	});

	const answers: Answers = {
		'B1:50°C!A6:H20': { key: 'right' },
		'B3:50°C!quantities': { key: 'use:mmol/L' },
		'B18:50°C!A14': {
			key: 'enter',
			values: { value: '3:00' },
			reason: 'Typing error, seen in the notebook.'
		},
		'B24:50°C!F20': { key: 'missing' },
		'B5:50°C!F13': { key: 'accept' },
		'B19:50°C!replicates': { key: 'samples' }
	};
	const omitted: Answers = {
		...answers,
		'B8:50°C!loq-E': { key: 'missing' },
		'B9:50°C!F6-G6': { key: 'not-determined' },
		'B10:50°C!trace-E': { key: 'missing' }
	};

	it('counts 14 rows, 13 distinct times and 42 concentration cells: 34 numbers, 1 with a unit, 6 limit codes and 1 date', () => {
		const base = settle({
			workbook,
			species,
			mapping: table.mapping,
			answers: { 'B3:50°C!quantities': { key: 'use:mmol/L' }, 'B18:50°C!A14': { key: 'keep' } }
		});
		expect(base.preview).toHaveLength(14);
		expect(new Set(base.preview.map((p) => p.time)).size).toBe(13);
		const settled = base.preview.flatMap((p) => Object.values(p.values));
		expect(settled.filter((v) => typeof v === 'number')).toHaveLength(34);
		// Stated limit: settled without a question. The other five codes, the unit and the date are still open.
		expect(settled.filter((v) => v !== null && typeof v === 'object')).toEqual([{ below: 0.002 }]);
		const open = base.findings
			.filter((f) => f.open && ['B5', 'B8', 'B9', 'B10', 'B24'].includes(f.rule))
			.flatMap((f) => f.cells);
		expect(open.sort()).toEqual(['E17', 'E19', 'E20', 'F13', 'F20', 'F6', 'G6']);
		expect(settled.length + open.length).toBe(42);
	});

	it('gives no run while a question is open', () => {
		const partly = settle({ workbook, species, mapping: withConditions(table.mapping), answers });
		expect(partly.open).toBe(3);
		expect(partly.run).toBeNull();
	});

	it('gives the run of the story once all is answered, corrections and conversions on the record', () => {
		const settled = settle({ workbook, species, mapping: withConditions(table.mapping), answers: omitted });
		expect(settlementSchema.parse(settled)).toEqual(settled);
		expect(mappingSchema.parse(settled.mapping)).toEqual(settled.mapping);
		const run = runContent.parse(settled.run);
		expect(run.timepoints.map((p) => p.time)).toEqual([0, 0.25, 0.5, 1, 1, 1.5, 2, 3, 4, 6, 8, 12, 25, 26]);
		expect(run.timepoints[1].values).toEqual({ A: 0.401, B: 0.078, C: 0.007 });
		expect(run.timepoints[7]).toMatchObject({
			time: 3,
			values: { A: 0.047, B: 0.269, C: 0.185 },
			source: { row: 14 }
		});
		expect(run.timepoints[13].values.B).toBeNull();
		expect(run.corrections).toEqual([
			{
				sheet: '50°C',
				cell: 'A14',
				original: '0:03',
				corrected: '3:00',
				reason: 'Typing error, seen in the notebook.'
			}
		]);
		expect(run.replicates).toBe('samples');
		expect(run.conversions?.join('\n')).toContain('F20 left as missing');
		expect(run.conversions?.join('\n')).toContain('Columns B–D (area %) kept for reference, not fitted.');
	});

	const fitted = (given: Answers) => {
		const { run } = settle({ workbook, species, mapping: withConditions(table.mapping), answers: given });
		// The story fits at the set temperature; the log and its excursion are another question.
		const { temperatureLog: _log, ...isothermal } = runContent.parse(run);
		// The story counts the rows after time zero.
		const timepoints = isothermal.timepoints.filter((p) => p.time > 0);
		const request = { ...scheme, runs: [{ ...isothermal, id: 'r1', timepoints }], options: { seed: 1 } };
		const report = fit(fitRequest.parse(request));
		return Object.fromEntries(report.parameters.map((p) => [p.id, p.estimate]));
	};

	it('leads to k1 0.796, k2 0.298 and k-2 0.0957 1/h with the limits left out', () => {
		const estimates = fitted(omitted);
		expect(estimates['s1.forward.kRef']).toBeCloseTo(0.796, 3);
		expect(estimates['s2.forward.kRef']).toBeCloseTo(0.298, 3);
		expect(estimates['s2.reverse.kRef']).toBeCloseTo(0.0957, 4);
	});

	it('leads to the same constants within 1 % when the limits are kept as limits', () => {
		const estimates = fitted({
			...answers,
			'B8:50°C!loq-E': { key: 'limit', values: { loq: 2 } },
			'B9:50°C!F6-G6': { key: 'not-detected', values: { lod: 0.6 } },
			'B10:50°C!trace-E': { key: 'between', values: { lod: 0.6, loq: 2 } }
		});
		expect(Math.abs(estimates['s1.forward.kRef'] / 0.796 - 1)).toBeLessThan(0.01);
		expect(Math.abs(estimates['s2.forward.kRef'] / 0.298 - 1)).toBeLessThan(0.01);
	});

	it('keeps the wrong time only when told to, and says so', () => {
		const forced = settle({
			workbook,
			species,
			mapping: withConditions(table.mapping),
			answers: { ...omitted, 'B18:50°C!A14': { key: 'keep' } }
		});
		expect(forced.run?.timepoints.find((p) => p.source?.row === 14)?.time).toBe(0.05);
		expect(forced.conversions.join('\n')).toContain('A14 kept at 0:03 although it comes after 2:00');
	});

	it('ends the run above a row where a new run begins, and gives the rest as a block', () => {
		const parted = settle({
			workbook,
			species,
			mapping: withConditions(table.mapping),
			answers: { ...omitted, 'B18:50°C!A14': { key: 'new-run' } }
		});
		expect(parted.rest).toEqual({ firstRow: 14, lastRow: 20, firstColumn: 1, lastColumn: 8 });
		expect(parted.preview.map((p) => p.row)).toEqual([6, 7, 8, 9, 10, 12, 13]);
	});

	it('reads the second table in min and g/L through the molar mass', () => {
		expect(second.findings.map((f) => f.rule)).toEqual(['B34']);
		const bare = propose(workbook, [{ id: 'A', name: 'HX-14' }]).tables[1];
		expect(bare.findings.filter((f) => f.open).map((f) => f.message)).toEqual([
			'A (column B) is in g/L. What is the molar mass of A?'
		]);
		const { run } = settle({ workbook, species, mapping: withConditions(second.mapping) });
		expect(run?.timeUnit).toBe('min');
		expect(run?.timepoints.map((p) => p.values.A)).toEqual(
			[98.1, 71, 52.2].map((v) => Number((v / 214.2).toPrecision(15)))
		);
	});

	it('gives the same answer each time', () => {
		const once = () =>
			JSON.stringify(
				settle({
					workbook: read('s02_messy.xlsx'),
					species,
					mapping: withConditions(table.mapping),
					answers: omitted
				})
			);
		expect(once()).toBe(once());
	});
});
