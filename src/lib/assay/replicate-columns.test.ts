/** Replicates side by side (B13): recognised by their headers, asked once for the table, kept with the saved mapping. */
import { describe, expect, it } from 'vitest';
import {
	answer,
	book,
	conditions,
	findingsOf,
	first,
	species,
	timesOf,
	valuesOf
} from '../server/sheets/reading/test-tables';
import { propose, settle, toSavedMapping } from './index';

const ROWS = [
	[0, 0.5, 0.52, 0.01, 0.03],
	[1, 0.4, 0.42, 0.1, 0.12],
	[2, 0.3, 0.32, 0.2, 0.22],
	[3, 0.2, 0.22, 0.3, 0.32],
	[4, 0.1, 0.12, 0.4, 0.42]
];
const headed = (...heads: string[]) =>
	book([['Time (h)', ...heads], ...ROWS.map((r) => r.slice(0, heads.length + 1))]);

describe('columns that are replicates of one species', () => {
	it.each([
		[['A rep 1 (mol/L)', 'A rep 2 (mol/L)']],
		[['A inj 1 (mol/L)', 'A inj 2 (mol/L)']],
		[['A #1 (mol/L)', 'A #2 (mol/L)']],
		[['A (1) [mol/L]', 'A (2) [mol/L]']],
		[['A_1 (mol/L)', 'A_2 (mol/L)']],
		[['A (mol/L)', 'A dup. (mol/L)']],
		[['HX-14 Probe 1 (mol/L)', 'HX-14 Probe 2 (mol/L)']],
		[['A, replicate a (mol/L)', 'A, replicate b (mol/L)']]
	])('B13: %j are read as A twice, and asked', (heads) => {
		const table = first(headed(...heads));
		expect(table.columns.map((c) => c.species)).toEqual([null, 'A', 'A']);
		expect(table.findings.map((f) => [f.level, f.rule, f.cells.join()])).toEqual([['ask', 'B13', 'B1,C1']]);
	});

	it('B13: one question for all species; each way of answering it', () => {
		const workbook = headed('A inj 1 (mol/L)', 'A inj 2 (mol/L)', 'B inj 1 (mol/L)', 'B inj 2 (mol/L)');
		expect(findingsOf(workbook, 'B13').map((f) => f.message)).toEqual([
			'Columns B–C for A, columns D–E for B: the headers number them as replicates. Injections of one sample, or separate samples?'
		]);
		const averaged = answer(workbook, { B13: { key: 'injections' } });
		expect(timesOf(averaged)).toEqual([0, 1, 2, 3, 4]);
		expect(valuesOf(averaged)?.[1]).toBeCloseTo(0.41, 12);
		expect(valuesOf(averaged, 'B')?.[1]).toBeCloseTo(0.11, 12);
		expect(averaged.conversions).toContain(
			'A: columns B–C averaged as injections of one sample; standard deviation of injection 0.0141421.'
		);
		const apart = answer(workbook, { B13: { key: 'samples' } });
		expect(timesOf(apart)).toEqual([0, 0, 1, 1, 2, 2, 3, 3, 4, 4]);
		expect(apart.run?.timepoints.slice(2, 4).map((p) => p.values)).toEqual([
			{ A: 0.4, B: 0.1 },
			{ A: 0.42, B: 0.12 }
		]);
		expect(apart.run?.timepoints[3].source?.cells).toEqual({ A: 'C3', B: 'E3' });
		expect(valuesOf(answer(workbook, { B13: { key: 'first' } }))).toEqual([0.5, 0.4, 0.3, 0.2, 0.1]);
	});

	it('B13: a limit or a gap in one of two injections is averaged as limits are', () => {
		const rows = ROWS.map((r) => r.slice(0, 3) as (number | string | null)[]);
		rows[3][2] = '<0.25';
		rows[4][2] = null;
		const workbook = book([['Time (h)', 'A inj 1 (mol/L)', 'A inj 2 (mol/L)'], ...rows]);
		expect(valuesOf(answer(workbook, { B13: { key: 'injections' } }))?.slice(3)).toEqual([
			{ below: 0.25 },
			0.1
		]);
	});

	it('B13: the answer is kept with the saved mapping and not asked again', () => {
		const workbook = headed('A inj 1 (mol/L)', 'A inj 2 (mol/L)');
		const table = first(workbook);
		const { mapping } = answer(workbook, { B13: { key: 'injections' } });
		const saved = [toSavedMapping('house method', table, mapping)];
		const again = propose(workbook, species, { saved }).tables[0];
		expect(again.findings).toEqual([]);
		const { run } = settle({ workbook, species, mapping: { ...again.mapping, conditions } });
		expect(run?.timepoints).toHaveLength(5);
	});

	it('B19: rows at equal times beside replicate columns are a question of their own', () => {
		const workbook = book([
			['Time (h)', 'A inj 1 (mol/L)', 'A inj 2 (mol/L)'],
			...[...ROWS.slice(0, 2), ROWS[1], ...ROWS.slice(2)].map((r) => r.slice(0, 3))
		]);
		const settled = answer(workbook, { B13: { key: 'injections' }, B19: { key: 'samples' } });
		expect(timesOf(settled)).toEqual([0, 1, 1, 2, 3, 4]);
		const both = answer(workbook, { B13: { key: 'samples' }, B19: { key: 'injections' } });
		expect(timesOf(both)).toEqual([0, 0, 1, 1, 2, 2, 3, 3, 4, 4]);
	});

	it('B32: two columns of one species that are not numbered stay a stop; they may be replicates all the same', () => {
		const workbook = headed('A (mol/L)', 'HX-14 (mol/L)');
		const [f] = findingsOf(workbook, 'B32');
		expect([f.level, f.options.map((o) => o.key)]).toEqual([
			'stop',
			['replicates', 'injections', 'use:B', 'use:C']
		]);
		expect(valuesOf(answer(workbook, { B32: { key: 'injections' } }))?.[0]).toBeCloseTo(0.51, 12);
		expect(valuesOf(answer(workbook, { B32: { key: 'use:C' } }))?.[0]).toBe(0.52);
	});

	it('B32: a lone "A (1)", and a species of the scheme that ends in a digit, are no replicates', () => {
		expect(first(headed('A (1) [mol/L]')).columns[1].species).toBeNull();
		const list = [...species, { id: 'A1', name: '' }, { id: 'A2', name: '' }];
		expect(first(headed('A1 (mol/L)', 'A2 (mol/L)'), list).columns.map((c) => c.species)).toEqual([
			null,
			'A1',
			'A2'
		]);
	});
});
