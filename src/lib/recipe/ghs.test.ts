import { describe, expect, it } from 'vitest';
import spot from '../../../tests/reference/c09d_ghs.json';
import table from '../../../tests/reference/ghs_statements.json';
import { findStatements, GHS_STATEMENTS, ghsStatement } from './ghs';

// Source: UN GHS, 10th revised edition (2023), as tabulated; see tests/reference/c09d_ghs.json.
describe('the list of GHS statements', () => {
	it('holds every statement of the stored table once, with the corrections marked', () => {
		const rows = [...table.hazard, ...table.euh, ...table.precautionary] as {
			code: string;
			statement: string;
			suggested_correction?: string;
		}[];
		const codes = new Set(rows.map((r) => r.code));
		expect(GHS_STATEMENTS.map((s) => s.code).sort()).toEqual([...codes].sort());
		for (const row of rows) {
			const found = ghsStatement(row.code);
			expect(found?.text).toBe(row.suggested_correction ?? row.statement);
			expect(found?.corrected).toBe(row.suggested_correction !== undefined);
		}
	});
	it('agrees with the wording looked up apart', () => {
		for (const [code, text] of Object.entries(spot.expected.spot_checks))
			expect(ghsStatement(code)?.text.replace(/vapou?r/, 'vapor(u)r')).toBe(text);
	});
	it('finds by code and by words', () => {
		expect(findStatements('H22')[0].code).toMatch(/^H22/);
		expect(findStatements('skin irritation').some((s) => s.code === 'H315')).toBe(true);
		expect(findStatements('')).toEqual([]);
	});
});
