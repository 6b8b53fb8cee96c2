import { describe, expect, it } from 'vitest';
import { criterionSchema } from '$lib/schemas/criterion';
import { isEmptyRow, messagesOf, rowsOf, toCriterion } from './criteria-form';

function form(entries: Record<string, string>): FormData {
	const data = new FormData();
	for (const [key, value] of Object.entries(entries)) data.set(key, value);
	return data;
}

describe('criteria as a plain form posts them', () => {
	it('come back in their order, whatever the order of the fields', () => {
		const rows = rowsOf(
			form({
				'criteria.1.species': 'C',
				'criteria.0.species': ' A ',
				'criteria.0.limit': '1.0',
				'criteria.1.limit': '3'
			})
		);
		expect(rows.map((r) => [r.species, r.limit])).toEqual([
			['A', '1.0'],
			['C', '3']
		]);
	});
	it('ignore fields that are none of theirs', () => {
		expect(rowsOf(form({ name: 'x', 'criteria.x.species': 'A', 'criteria.0.__proto__': 'A' }))).toEqual([]);
	});
	it('are empty when nothing was entered', () => {
		const [row] = rowsOf(form({ 'criteria.0.species': '', 'criteria.0.limit': '', 'criteria.0.note': '' }));
		expect(isEmptyRow(row)).toBe(true);
	});
	it('are checked by the schema, with the message beside the field', () => {
		const rows = rowsOf(form({ 'criteria.0.species': 'A', 'criteria.0.limit': '1,5' }));
		const read = criterionSchema.safeParse(toCriterion(rows[0]));
		expect(read.success).toBe(false);
		expect(messagesOf(read.error!.issues)).toHaveProperty('limit');
		const right = rowsOf(
			form({ 'criteria.0.species': 'A', 'criteria.0.limit': '1.5', 'criteria.0.relation': 'NMT' })
		);
		expect(criterionSchema.parse(toCriterion(right[0])).limit).toBe(1.5);
	});
});
