/** Values (B6 to B12, B20, B24 to B26, B39): numbers, limits, and cells that hold neither. */
import { describe, expect, it } from 'vitest';
import {
	species,
	conditions,
	changed,
	book,
	csv,
	first,
	findingsOf,
	answer,
	valuesOf,
	summary
} from '../server/sheets/reading/test-tables';
import type { TestCell } from '../server/sheets/reading/test-workbook';
import { settle } from './index';

describe('numbers', () => {
	it('B6: an ambiguous number is shown both ways and asked once for the file', () => {
		const workbook = csv('Time (h);A (mol/L)\n0;5,125\n1;4,250\n2;3,500\n3;2,125\n4;1,250\n');
		const [f] = findingsOf(workbook, 'B6');
		expect([f.level, f.message]).toEqual([
			'ask',
			'"5,125" could be 5125 or 5.125. Nothing else in the file tells which.'
		]);
		expect(valuesOf(answer(workbook, { B6: { key: 'comma' }, B33: { key: 'keep' } }))).toEqual([
			5.125, 4.25, 3.5, 2.125, 1.25
		]);
		expect(
			valuesOf(answer(workbook, { B6: { key: 'point' }, B4: { key: 'keep' }, B33: { key: 'keep' } }))
		).toEqual([5125, 4250, 3500, 2125, 1250]);
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
		expect(valuesOf(answer(workbook, { B20: { key: 'keep' }, B4: { key: 'keep' } }))?.slice(0, 4)).toEqual([
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

	it('B11: a typed 0 beside a LOQ that the sheet states is offered as below it, with its place', () => {
		const workbook = book([...changed({}), ['LOQ 2.0 mmol/L']]);
		const [f] = findingsOf(workbook, 'B11');
		expect([f.level, f.cells.join(), f.message]).toEqual([
			'note',
			'C2',
			'C2: a typed 0 stays 0. The LOQ of B is 0.002, by A8; "below LOQ" may be what is meant.'
		]);
		expect(valuesOf(answer(workbook, {}), 'B')?.[0]).toBe(0);
		const mapping = { ...first(workbook).mapping, conditions };
		const { run } = settle({ workbook, species, mapping, answers: { [f.id]: { key: 'censor' } } });
		expect(run?.timepoints[0].values.B).toEqual({ below: 0.002 });
	});

	it('B11: texts of more than fifty wordings are asked about together', () => {
		const rows = Array.from({ length: 60 }, (_, i): TestCell[] => [
			i,
			`remark ${String.fromCharCode(97 + (i % 26))}${'x'.repeat(i)}`,
			0.1
		]);
		const workbook = book([
			['Time (h)', 'A (mol/L)', 'B (mol/L)'],
			[0, 0.5, 0],
			...rows.map((r, i) => [i + 1, r[1], r[2]])
		]);
		const asked = findingsOf(workbook, 'B11');
		expect([asked.length, asked[50].count, asked[50].message]).toEqual([
			51,
			10,
			'10 further cells of A (column B) hold text that is no number. Leave them as missing?'
		]);
	});
});
