import { isEditable } from '$lib/recipe/states';
import { recipeContent, type RecipeContent } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { Recipe, RecipeVersion } from '../database/models';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { about } from './audit';
import { findRecipe, findVersion, newer, wrongState } from './find';
import { versionHash } from './signed-record';

export interface SaveRecipeInput {
	recipeId: string;
	number: number;
	/** Version of the record that the person read. */
	version: number;
	content: RecipeContent;
}

/** What the recipe rests on is said by the fit alone: a page or script cannot write it. */
function keepBasis(stored: RecipeContent, sent: RecipeContent): RecipeContent {
	return { ...sent, basis: stored.basis, criteria: stored.criteria };
}

function checkIds(content: RecipeContent): void {
	const lists = ['setPoints', 'charges', 'equipment', 'procedure', 'ipc', 'hazards'] as const;
	for (const list of lists) {
		const ids = content[list].map((item) => item.id);
		const twice = ids.find((id, i) => ids.indexOf(id) !== i);
		if (twice)
			throw new AppError(
				'invalid',
				`Two entries of ${list} have the same id "${twice}". Each needs its own.`,
				{
					fields: [{ field: list, message: `The id "${twice}" stands twice.` }]
				}
			);
	}
}

/** Saves a draft. Whoever saves becomes one of those who wrote this version and cannot validate it. */
export async function saveRecipe(
	actor: Actor,
	input: SaveRecipeInput
): Promise<{ version: number; contentHash: string; savedAt: Date }> {
	await findRecipe(actor, input.recipeId, 'recipe.write');
	const sent = recipeContent.parse(input.content);
	checkIds(sent);
	return write(async (tx) => {
		const recipe = await findRecipe(actor, input.recipeId, 'recipe.write', tx);
		const row = await findVersion(recipe, input.number, tx);
		if (row.version !== input.version) throw newer(row);
		if (!isEditable(row.state))
			throw wrongState(`Version ${row.number} is ${row.state}: start a new version to change it.`);
		const content = keepBasis(recipeContent.parse(row.content), sent);
		const hash = versionHash({ ...row.get(), recipeId: recipe.id, windowId: row.windowId, content });
		const savedAt = new Date();
		if (hash === row.contentHash) return { version: row.version, contentHash: hash, savedAt: row.updatedAt };
		const contributorIds = [...new Set([...row.contributorIds, actor.userId])];
		const [count] = await RecipeVersion.update(
			{ content, contentHash: hash, contributorIds, version: row.version + 1, updatedAt: savedAt },
			{ where: { id: row.id, version: input.version, state: 'draft' }, transaction: tx }
		);
		if (count !== 1) throw newer(row);
		await Recipe.update(
			{ title: content.title, updatedAt: savedAt },
			{ where: { id: recipe.id }, transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'recipe.version-saved',
			payload: { number: row.number, contentHash: hash },
			...about(recipe, row.number)
		});
		return { version: row.version + 1, contentHash: hash, savedAt };
	});
}
