import { describe, expect, it } from 'vitest';
import type { SpeciesContent } from '$lib/schemas/scheme';
import type { GridRow, GridWorkbook } from '$lib/schemas/sheet';
import { settledAsProposed } from './as-proposed';
import { propose } from './propose';
import { settle } from './settle';

const rows: GridRow[] = [
	{
		r: 1,
		c: [
			[1, 'time (h)'],
			[2, 'A (mol/L)'],
			[3, 'B (mol/L)']
		]
	},
	...[0, 1, 2, 3, 4, 5].map((t): GridRow => ({
		r: t + 2,
		c: [
			[1, t],
			[2, t === 3 ? 'n.d.' : 0.5 - t / 20],
			[3, t / 20]
		]
	}))
];
const workbook: GridWorkbook = {
	fileName: 'run.csv',
	kind: 'text',
	dateSystem: 1900,
	styles: [],
	sheets: [
		{
			name: 'run',
			state: 'visible',
			rows,
			merges: [],
			hiddenRows: [],
			hiddenColumns: [],
			filter: null,
			lastRow: 7,
			lastColumn: 3
		}
	]
};
const species = ['A', 'B'].map((id): SpeciesContent => ({ id, name: '', role: 'intermediate' }));

describe('a table as it was proposed', () => {
	it('is settled already, as it would be settled anew, by the limits it was proposed with', () => {
		for (const checks of [undefined, { massBalanceLow: 99.9, massBalanceHigh: 100.1 }]) {
			const { mapping } = propose(workbook, species, { checks }).tables[0];
			const settled = settledAsProposed(mapping);
			expect(settled).toEqual(settle({ workbook, species, mapping, checks }));
			expect(settled?.open).toBeGreaterThan(0);
		}
	});
	it('has no settlement once anything about it was decided, nor where a fit was thought of', () => {
		const { mapping } = propose(workbook, species).tables[0];
		expect(settledAsProposed({ ...mapping })).toBeNull();
		expect(settledAsProposed(propose(workbook, species, { parameters: 3 }).tables[0].mapping)).toBeNull();
	});
});
