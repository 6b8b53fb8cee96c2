/** Units and quantities (B4, B5, B21 to B23): nothing is assumed, each conversion is put in words. */
import { describe, expect, it } from 'vitest';
import type { Answers } from '../schemas/sheet';
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
import type { TestCell } from '../server/sheets/reading/test-workbook';
import { settle } from './index';

describe('units', () => {
	it('B4: a column without a unit stops, and no unit is assumed', () => {
		const workbook = book(changed({}, ['Time (h)', 'A', 'B (mol/L)']));
		const [f] = findingsOf(workbook, 'B4');
		expect([...summary(f)!, f.message]).toEqual([
			'stop',
			'B1',
			'Column B has no unit. Choose one; we will not assume.'
		]);
		expect(valuesOf(answer(workbook, { B4: { key: 'mmol/L' }, B33: { key: 'keep' } }))).toEqual([
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

	it('B4: a temperature column without a unit stops; kelvin is brought to °C', () => {
		const workbook = book([[...HEAD, 'T internal'], ...ROWS.map((row): TestCell[] => [...row, 323.15])]);
		expect(summary(findingsOf(workbook, 'B4')[0])).toEqual(['stop', 'D1']);
		expect(answer(workbook, { B4: { key: 'K' } }).run?.temperatureLog?.[0]).toEqual({ time: 0, celsius: 50 });
		const hot = answer(workbook, { B4: { key: 'degC' } }).findings.filter((f) => f.open);
		expect(hot.map((f) => [f.rule, f.found, f.cells[0]])).toEqual([['B4', 'about 323.15 °C', 'D2']]);
	});

	it('B4: % w/w asks for the density, a sum of species of unlike mass for the one that was used', () => {
		const weight = book([
			['Time (h)', 'A (% w/w)'],
			...ROWS.map(([t, a]): TestCell[] => [t, Number(a) * 20])
		]);
		const heavy = [
			{ ...species[0], molarMassGPerMol: 200 },
			{ ...species[1], molarMassGPerMol: 100 }
		];
		const mapping = { ...first(weight).mapping, conditions };
		const { findings } = settle({ workbook: weight, species: heavy, mapping });
		expect(findings.map((f) => f.id)).toEqual(['B4:Data!density']);
		const run = (answers: Answers) => settle({ workbook: weight, species: heavy, mapping, answers }).run;
		expect(run({ 'B4:Data!density': { key: 'density', values: { value: 0 } } })).toBeNull();
		expect(
			run({ 'B4:Data!density': { key: 'density', values: { value: 1000 } } })?.timepoints[0].values.A
		).toBe(0.5);
		const sum = {
			...mapping,
			columns: mapping.columns.map((c) => (c.column === 2 ? { ...c, weights: { A: 1, B: 1 } } : c))
		};
		const asked = settle({ workbook: weight, species: heavy, mapping: sum }).findings;
		expect(asked[0].message).toContain('its species differ in molar mass. Which one was used?');
	});

	it('B4: a signal takes a response factor that is given, never one of zero', () => {
		const workbook = book([
			['Time (h)', 'A (area)'],
			...ROWS.map(([t, a]): TestCell[] => [t, Number(a) * 1000])
		]);
		expect(valuesOf(answer(workbook, { B4: { key: 'given', values: { value: 1000 } } }))).toEqual([
			0.5, 0.4, 0.3, 0.2, 0.1, 0.05
		]);
		expect(answer(workbook, { B4: { key: 'given', values: { value: 0 } } }).findings[0].problem).toBe(
			'The response factor must be greater than zero.'
		);
	});
});
