import { hasLocalConstants } from '$lib/kinetics/fit/local-slots';
import { createRecipeForm, type CreateRecipeForm } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { Recipe, RecipeVersion, WindowResult } from '../database/models';
import { AppError, notFound } from '../errors';
import type { Actor } from '../policy';
import { findStudy } from '../studies/find';
import { criteriaOf } from '../studies/read-study';
import { fitFacts } from './fit-facts';
import { prefill } from './prefill';
import { versionHash } from './signed-record';
import { windowCharge, windowFacts } from './window-facts';

export interface CreateRecipeInput extends CreateRecipeForm {
	studyId: string;
}

/** A recipe whose first draft says what the fit, the window and the study say. */
export async function createRecipe(
	actor: Actor,
	input: CreateRecipeInput
): Promise<{ id: string; number: number; version: number; contentHash: string }> {
	const study = await findStudy(actor, input.studyId, 'recipe.write');
	const asked = createRecipeForm.parse(input);
	return write(async (tx) => {
		const facts = await fitFacts(study.id, asked.fitId, tx);
		if (hasLocalConstants(facts.fit.report))
			throw new AppError(
				'invalid',
				'This fit has rate constants of its own in each run: it checks the temperature dependence and is no basis for a recipe. Use a fit whose constants are shared by all runs.',
				{ fields: [{ field: 'fitId', message: 'Choose a fit whose constants are shared by all runs.' }] }
			);
		const window = asked.windowId
			? await WindowResult.findOne({ where: { id: asked.windowId, fitId: facts.fit.id }, transaction: tx })
			: null;
		if (asked.windowId && !window) throw notFound('window of this fit');
		const content = prefill({
			title: asked.title,
			decision: study.decision,
			criteria: await criteriaOf(study.id, tx),
			facts,
			window: window && {
				number: window.number,
				facts: windowFacts(window.result),
				charge: windowCharge(window.input)
			},
			scale: asked.scale
		});
		const number = (await Recipe.count({ where: { studyId: study.id }, transaction: tx })) + 1;
		const recipe = await Recipe.create(
			{
				studyId: study.id,
				groupId: study.groupId,
				number,
				title: content.title,
				createdById: actor.userId,
				updatedAt: new Date()
			},
			{ transaction: tx }
		);
		const windowId = window?.id ?? null;
		const hash = versionHash({ recipeId: recipe.id, number: 1, fitId: facts.fit.id, windowId, content });
		await RecipeVersion.create(
			{
				recipeId: recipe.id,
				number: 1,
				state: 'draft',
				content,
				contentHash: hash,
				fitId: facts.fit.id,
				windowId,
				authorId: actor.userId,
				contributorIds: [actor.userId],
				updatedAt: new Date()
			},
			{ transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'recipe.created',
			payload: { title: content.title, fitId: facts.fit.id },
			groupId: recipe.groupId,
			studyId: study.id,
			objectType: 'recipe',
			objectId: recipe.id,
			objectVersion: 1
		});
		return { id: recipe.id, number: 1, version: 1, contentHash: hash };
	});
}
