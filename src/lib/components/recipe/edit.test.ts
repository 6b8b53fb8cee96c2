import { describe, expect, it } from 'vitest';
import { sampleRecipe } from '$lib/recipe/fixture';
import { freshId, moved, withItem, without } from './edit';

describe('changes to a draft', () => {
	it('move an entry and stop at the ends', () => {
		const items = ['a', 'b', 'c'].map((id) => ({ id }));
		expect(moved(items, 'c', -1).map((i) => i.id)).toEqual(['a', 'c', 'b']);
		expect(moved(items, 'a', -1).map((i) => i.id)).toEqual(['a', 'b', 'c']);
		expect(moved(items, 'a', 9).map((i) => i.id)).toEqual(['b', 'c', 'a']);
	});
	it('give a new entry an id that no other has', () => {
		expect(freshId([{ id: 'op1' }, { id: 'op3' }], 'op')).toBe('op4');
		expect(freshId([{ id: 'op2' }], 'op')).toBe('op3');
	});
	it('leave the content that they came from as it was', () => {
		const before = sampleRecipe();
		const after = withItem(before, 'setPoints', 't', { value: 49 });
		expect(before.setPoints[0].value).toBe(50);
		expect(after.setPoints[0].value).toBe(49);
		expect(without(after, 'setPoints', 't').setPoints).toEqual([]);
	});
});
