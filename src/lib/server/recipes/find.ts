import type { Tx } from '../database';
import { Recipe, RecipeVersion } from '../database/models';
import { AppError, notFound, versionChanged } from '../errors';
import { isId } from '../ids';
import { groupsWhere, requireCan, type Action, type Actor } from '../policy';

/** The recipe, if it is in sight of the actor's groups and the actor may do this with it. */
export async function findRecipe(actor: Actor, recipeId: unknown, action: Action, tx?: Tx): Promise<Recipe> {
	if (!isId(recipeId)) throw notFound('recipe');
	const inSight = groupsWhere({ ...actor, scopes: undefined }, 'recipe.read');
	const recipe = await Recipe.findOne({ where: { id: recipeId, groupId: inSight }, transaction: tx });
	if (!recipe) throw notFound('recipe');
	requireCan(actor, recipe.groupId, action, 'recipe');
	return recipe;
}

/** A version by its number; without one the newest. */
export async function findVersion(recipe: Recipe, number?: number | null, tx?: Tx): Promise<RecipeVersion> {
	const version = await RecipeVersion.findOne({
		where: { recipeId: recipe.id, ...(number == null ? {} : { number }) },
		order: [['number', 'DESC']],
		transaction: tx
	});
	if (!version) throw notFound('recipe version');
	return version;
}

export const wrongState = (message: string): AppError => new AppError('wrong-state', message);

/** What a page needs to show who was faster. */
export const newer = (version: RecipeVersion): AppError =>
	versionChanged({
		number: version.number,
		state: version.state,
		version: version.version,
		contentHash: version.contentHash,
		updatedAt: version.updatedAt
	});

/**
 * Moves a version on with a conditional UPDATE: it takes place only where state and version are still those that the
 * actor saw. Returns nothing; throws when somebody else was faster.
 */
export async function moveVersion(
	tx: Tx,
	version: RecipeVersion,
	fields: Partial<Pick<RecipeVersion, 'state' | 'submittedAt' | 'contributorIds'>>
): Promise<void> {
	const [count] = await RecipeVersion.update(
		{ ...fields, version: version.version + 1, updatedAt: new Date() },
		{ where: { id: version.id, version: version.version, state: version.state }, transaction: tx }
	);
	if (count !== 1) throw newer(version);
}
