/** Answers, corrections, saved mappings, and what a sheet says of its conditions. */
import { describe, expect, it } from 'vitest';
import type { Answer } from '../schemas/sheet';
import {
	species,
	conditions,
	changed,
	book,
	first,
	findingsOf,
	answer,
	valuesOf
} from '../server/sheets/reading/test-tables';
import { propose, settle, toSavedMapping } from './index';

describe('answers, corrections and saved mappings', () => {
	it('an answer that lacks its value, or fits no option, leaves the question open and says why', () => {
		const workbook = book(changed({ '4,1': '<LOQ' }));
		const mapping = { ...first(workbook).mapping, conditions };
		const [f] = findingsOf(workbook, 'B8');
		const problem = (a: Answer) => settle({ workbook, species, mapping, answers: { [f.id]: a } }).findings[0];
		expect(problem({ key: 'limit' })).toMatchObject({ open: true, problem: 'LOQ is missing.' });
		expect(problem({ key: 'limit', values: { loq: 'low' } })).toMatchObject({
			open: true,
			problem: '"low" is not a number. Write digits, such as 0.25.'
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
