import { mayMove, mayStartNext } from '$lib/recipe/states';
import { reasonText, recipeContent } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import { write, type Tx } from '../database';
import { RecipeVersion, WindowResult, type Recipe } from '../database/models';
import { notFound } from '../errors';
import type { Actor } from '../policy';
import { criteriaOf } from '../studies/read-study';
import { about } from './audit';
import { findRecipe, findVersion, moveVersion, wrongState } from './find';
import { fitFacts } from './fit-facts';
import { prefill } from './prefill';
import { versionHash } from './signed-record';
import { windowCharge, windowFacts } from './window-facts';

export interface StartVersionInput {
	recipeId: string;
	/** Why the recipe is changed: words, not a dot. */
	reason: string;
	/** Rest the new version on another fit (and window) of the same study; set-points and basis come from it. */
	fitId?: string | null;
	windowId?: string | null;
}

/** Content of the next version: that of the last one, on a newer basis where one is asked for. */
async function nextContent(tx: Tx, recipe: Recipe, last: RecipeVersion, input: StartVersionInput) {
	const content = recipeContent.parse(last.content);
	const fitId = input.fitId ?? last.fitId;
	const windowId = input.fitId ? (input.windowId ?? null) : (input.windowId ?? last.windowId);
	if (fitId === last.fitId && windowId === last.windowId) return { content, fitId, windowId };
	const facts = await fitFacts(recipe.studyId, fitId, tx);
	const window = windowId
		? await WindowResult.findOne({ where: { id: windowId, fitId }, transaction: tx })
		: null;
	if (windowId && !window) throw notFound('window of this fit');
	const fresh = prefill({
		title: content.title,
		decision: content.target,
		criteria: await criteriaOf(recipe.studyId, tx),
		facts,
		window: window && {
			number: window.number,
			facts: windowFacts(window.result),
			charge: windowCharge(window.input)
		},
		scale: content.scale
	});
	const { basis, criteria, setPoints, hold } = fresh;
	return { content: { ...content, basis, criteria, setPoints, hold }, fitId, windowId };
}

/** Who wrote what the new version takes over; what a group lead validated was written by nobody alone any more. */
const carriedOver = (last: RecipeVersion): string[] =>
	last.state === 'validated' || last.state === 'superseded' ? [] : last.contributorIds;

async function takeBack(tx: Tx, actor: Actor, recipe: Recipe, last: RecipeVersion): Promise<void> {
	if (!mayMove(last.state, 'takeBack')) return;
	await moveVersion(tx, last, { state: 'returned' });
	await appendAudit(tx, actor, {
		type: 'recipe.taken-back',
		payload: { number: last.number },
		...about(recipe, last.number)
	});
}

/** An edit after review begins a new draft version with a reason; signatures do not carry over. */
export async function startNewVersion(
	actor: Actor,
	input: StartVersionInput
): Promise<{ number: number; version: number; contentHash: string }> {
	await findRecipe(actor, input.recipeId, 'recipe.write');
	const reason = reasonText.parse(input.reason);
	return write(async (tx) => {
		const recipe = await findRecipe(actor, input.recipeId, 'recipe.write', tx);
		const last = await findVersion(recipe, null, tx);
		if (!mayStartNext(last.state))
			throw wrongState(
				last.state === 'draft'
					? `Version ${last.number} is a draft already: change it there.`
					: 'This recipe is withdrawn. Begin a new recipe from a fit.'
			);
		const next = await nextContent(tx, recipe, last, input);
		const number = last.number + 1;
		const hash = versionHash({ recipeId: recipe.id, number, ...next });
		await takeBack(tx, actor, recipe, last);
		await RecipeVersion.create(
			{
				recipeId: recipe.id,
				number,
				state: 'draft',
				...next,
				contentHash: hash,
				reason,
				authorId: actor.userId,
				contributorIds: [...new Set([...carriedOver(last), actor.userId])],
				updatedAt: new Date()
			},
			{ transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'recipe.version-started',
			payload: { number, from: last.number },
			reason,
			...about(recipe, number)
		});
		return { number, version: 1, contentHash: hash };
	});
}
