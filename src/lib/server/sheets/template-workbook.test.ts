import { describe, expect, it } from 'vitest';
import { diffWorkbooks, propose, settle } from '$lib/assay';
import type { SpeciesContent } from '$lib/schemas/scheme';
import { readBytes } from './reading/read';
import { templateWorkbook } from './template-workbook';

const schemes: Record<string, SpeciesContent[]> = {
	'one species without a name': [{ id: 'A', name: '' }],
	'three named species': [
		{ id: 'A', name: 'HX-14', role: 'starting material' },
		{ id: 'B', name: 'HX-14b' },
		{ id: 'C', name: 'lactone' }
	],
	'a reagent in excess, which is not assayed': [
		{ id: 'A', name: 'acid' },
		{ id: 'N', name: 'amine', role: 'reagent in excess' },
		{ id: 'P', name: 'amide' }
	],
	'symbols that look like units': [
		{ id: 'D', name: '' },
		{ id: 'H', name: 'K' },
		{ id: 'M', name: 'area' },
		{ id: 'S', name: 'time' }
	],
	'names that look like formulas': [
		{ id: 'A', name: '=1+1' },
		{ id: 'B', name: '@x' }
	],
	'twelve species': Array.from({ length: 12 }, (_, i) => ({ id: `X${i + 1}`, name: `impurity ${i + 1}` }))
};

describe('the template', () => {
	it.each(Object.entries(schemes))('for %s reads back without a single finding', async (_, species) => {
		const workbook = readBytes(await templateWorkbook(species, 'Trial study'), 'template.xlsx');
		const proposal = propose(workbook, species);
		expect(proposal.findings).toEqual([]);
		expect(proposal.tables.map((t) => t.findings)).toEqual([[]]);
		const seen = species.filter((s) => s.role !== 'reagent in excess').map((s) => s.id);
		const read = proposal.tables[0].columns.filter((c) => c.role === 'species');
		expect(read.map((c) => [c.species, c.unit])).toEqual(seen.map((id) => [id, 'mol/L']));
		const conditions = {
			temperature: { value: 40, unit: 'degC' },
			initial: { [seen[0]]: { value: 0.5, unit: 'mol/L' } },
			excess: {}
		};
		const { run } = settle({ workbook, species, mapping: { ...proposal.tables[0].mapping, conditions } });
		expect(run?.timepoints).toHaveLength(7);
		expect(run?.timeUnit).toBe('h');
	});

	it('offers the limits of its LOQ row once they are filled in', async () => {
		const species = schemes['three named species'];
		const workbook = readBytes(await templateWorkbook(species), 'template.xlsx');
		const filled = structuredClone(workbook);
		filled.sheets[0].rows.find((r) => r.r === 5)?.c.push([2, 0.002]);
		filled.sheets[0].rows.find((r) => r.r === 12)?.c.splice(1, 1, [2, '<LOQ']);
		const [table] = propose(filled, species).tables;
		expect(table.findings.map((f) => [f.rule, f.options[0].needsValue?.[0]])).toEqual([
			['B8', { key: 'loq', label: 'LOQ', kind: 'number', unit: 'mol/L', suggested: 0.002, source: 'B5' }]
		]);
	});
});

describe('the difference of two files', () => {
	it('lists changed, added and emptied cells, and a change that the display hides', async () => {
		const before = readBytes(await templateWorkbook(schemes['three named species']), 'a.xlsx');
		const after = structuredClone(before);
		const row = after.sheets[0].rows.find((r) => r.r === 7);
		row?.c.splice(1, 1, [2, 0.9]);
		row?.c.splice(2, 1);
		after.sheets[0].rows.push({ r: 40, c: [[1, 'checked']] });
		const { changes, count } = diffWorkbooks(before, after);
		expect(count).toBe(3);
		expect(changes.map((c) => [c.cell, c.before, c.after])).toEqual([
			['B7', '0.42324', '0.9'],
			['C7', '0.05834', ''],
			['A40', '', 'checked']
		]);
		const finer = structuredClone(before);
		finer.sheets[0].rows.find((r) => r.r === 7)?.c.splice(1, 1, [2, 0.4232400000000001]);
		expect(diffWorkbooks(before, finer).changes[0].stored).toEqual({
			before: '0.42324',
			after: '0.4232400000000001'
		});
		expect(diffWorkbooks(before, structuredClone(before)).count).toBe(0);
	});
});
