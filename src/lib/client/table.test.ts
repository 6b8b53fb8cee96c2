import { describe, expect, it } from 'vitest';
import { toTsv, type TableColumn } from './table';

interface Row {
	name: string;
	k: number | null;
}
const columns: TableColumn<Row>[] = [
	{ key: 'name', label: 'constant' },
	{ key: 'k', label: 'estimate', unit: '1/h', text: (r) => String(r.k?.toFixed(2)) }
];

describe('a copied table', () => {
	it('carries a header with units and numbers in full precision, not as shown', () => {
		expect(toTsv(columns, [{ name: 'k1', k: 0.793612345 }])).toBe(
			'constant\testimate [1/h]\nk1\t0.793612345'
		);
	});
	it('leaves missing values empty and keeps negative numbers numbers', () => {
		expect(toTsv(columns, [{ name: 'a', k: null }])).toBe('constant\testimate [1/h]\na\t');
		expect(toTsv(columns, [{ name: 'b', k: -1.5 }])).toContain('b\t-1.5');
	});
	it('marks text that a spreadsheet would run as a formula, and keeps one row a line', () => {
		expect(toTsv(columns, [{ name: '=HYPERLINK("x")', k: 1 }])).toContain('\'=HYPERLINK("x")\t1');
		expect(toTsv(columns, [{ name: 'two\nlines\there', k: 1 }])).toContain('two lines here\t1');
	});
});
