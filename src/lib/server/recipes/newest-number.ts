import type { Actor } from '../policy';
import { findRecipe, findVersion } from './find';

/** The version that a call means: the one it names, else the newest. */
export async function numberOf(actor: Actor, recipeId: string, asked: number | undefined): Promise<number> {
	if (asked !== undefined) return asked;
	return (await findVersion(await findRecipe(actor, recipeId, 'recipe.read'))).number;
}
