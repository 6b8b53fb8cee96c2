import { describe, expect, it } from 'vitest';
import { RECIPE_STATES } from '$lib/schemas/recipe';
import { afterMove, isEditable, mayMove, mayStartNext, MOVES, type Move } from './states';

describe('the life of a recipe version', () => {
	const allowed: Record<Move, string[]> = {
		submit: ['draft'],
		return: ['in review'],
		takeBack: ['in review'],
		validate: ['in review'],
		supersede: ['validated'],
		withdraw: ['in review', 'returned', 'validated', 'superseded']
	};
	it('refuses every move that the table does not list', () => {
		for (const move of Object.keys(MOVES) as Move[])
			for (const state of RECIPE_STATES)
				expect([move, state, mayMove(state, move)]).toEqual([move, state, allowed[move].includes(state)]);
	});
	it('cannot reach validated except through review', () => {
		const into = (Object.keys(MOVES) as Move[]).filter((m) => afterMove(m) === 'validated');
		expect(into).toEqual(['validate']);
		expect(MOVES.validate.from).toEqual(['in review']);
	});
	it('lets content be changed in a draft alone, and a withdrawn recipe begin nothing', () => {
		expect(RECIPE_STATES.filter(isEditable)).toEqual(['draft']);
		expect(mayStartNext('withdrawn')).toBe(false);
		expect(mayStartNext('draft')).toBe(false);
	});
});
