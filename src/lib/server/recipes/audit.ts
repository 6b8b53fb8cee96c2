import type { Recipe } from '../database/models';

/** The columns that every audit entry on a recipe shares. */
export const about = (recipe: Recipe, number: number) => ({
	groupId: recipe.groupId,
	studyId: recipe.studyId,
	objectType: 'recipe',
	objectId: recipe.id,
	objectVersion: number
});
