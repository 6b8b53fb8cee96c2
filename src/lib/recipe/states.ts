import type { RecipeState } from '$lib/schemas/recipe';

/**
 * The life of a version: Draft → In review → (Returned) → Validated → Superseded | Withdrawn.
 * Content can be changed in a draft alone; every later edit makes a new draft version with a reason.
 */
export const MOVES = {
	submit: { from: ['draft'], to: 'in review' },
	return: { from: ['in review'], to: 'returned' },
	/** The author takes a version back by starting the next one. */
	takeBack: { from: ['in review'], to: 'returned' },
	validate: { from: ['in review'], to: 'validated' },
	supersede: { from: ['validated'], to: 'superseded' },
	withdraw: { from: ['in review', 'returned', 'validated', 'superseded'], to: 'withdrawn' }
} as const satisfies Record<string, { from: readonly RecipeState[]; to: RecipeState }>;
export type Move = keyof typeof MOVES;

export function mayMove(state: RecipeState, move: Move): boolean {
	return (MOVES[move].from as readonly RecipeState[]).includes(state);
}
export const afterMove = (move: Move): RecipeState => MOVES[move].to;

export const isEditable = (state: RecipeState): boolean => state === 'draft';
/** A new version may begin from anything that is not itself still a draft or withdrawn. */
export const mayStartNext = (state: RecipeState): boolean => state !== 'draft' && state !== 'withdrawn';
export const mayBeVerified = (state: RecipeState): boolean => state === 'validated' || state === 'superseded';

export const STATE_NAMES: Record<RecipeState, string> = {
	draft: 'Draft',
	'in review': 'In review',
	returned: 'Returned',
	validated: 'Validated',
	superseded: 'Superseded',
	withdrawn: 'Withdrawn'
};

/** Stands wherever the word "Validated" stands. */
export const WHAT_VALIDATED_SAYS =
	'“Validated” says that the kinetics predicted an unused run and that a group lead signed this version. It is not process validation.';
