export const RECIPE_STATES = [
	'draft',
	'in review',
	'returned',
	'validated',
	'superseded',
	'withdrawn'
] as const;
export type RecipeState = (typeof RECIPE_STATES)[number];
