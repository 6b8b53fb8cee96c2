import type { Tx } from '../database';
import { Recipe, RecipeVersion, Share } from '../database/models';
import { notFound } from '../errors';
import { isId } from '../ids';
import { groupsWhere, type Actor } from '../policy';

export interface FoundShare {
	share: Share;
	version: RecipeVersion;
	recipe: Recipe;
}

/** A share with one of the actor's groups that has not been ended, with exactly the version that it pins. */
export async function findShare(actor: Actor, shareId: unknown, tx?: Tx): Promise<FoundShare> {
	if (!isId(shareId)) throw notFound('shared recipe');
	const share = await Share.findOne({
		where: { id: shareId, groupId: groupsWhere(actor, 'recipe.readShared'), endedAt: null },
		transaction: tx
	});
	const version = share && (await RecipeVersion.findByPk(share.recipeVersionId, { transaction: tx }));
	const recipe = version && (await Recipe.findByPk(version.recipeId, { transaction: tx }));
	if (!share || !version || !recipe) throw notFound('shared recipe');
	return { share, version, recipe };
}
