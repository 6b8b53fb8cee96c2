import { mayMove } from '$lib/recipe/states';
import { reasonText } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import type { Actor } from '../policy';
import { about } from './audit';
import { findRecipe, findVersion, moveVersion, newer, wrongState } from './find';
import { link, tellHolders, tellPerson } from './mail';

export interface WithdrawInput {
	recipeId: string;
	number: number;
	version: number;
	reason: string;
}

/** Withdraws a version: it stays readable under a banner, and whoever holds the recipe is told. */
export async function withdrawRecipe(
	actor: Actor,
	input: WithdrawInput
): Promise<{ state: string; version: number }> {
	await findRecipe(actor, input.recipeId, 'recipe.withdraw');
	const reason = reasonText.parse(input.reason);
	return write(async (tx) => {
		const recipe = await findRecipe(actor, input.recipeId, 'recipe.withdraw', tx);
		const row = await findVersion(recipe, input.number, tx);
		if (row.version !== input.version) throw newer(row);
		if (!mayMove(row.state, 'withdraw'))
			throw wrongState(
				row.state === 'draft'
					? 'A draft has gone to nobody yet, so there is nothing to withdraw.'
					: `Version ${row.number} is ${row.state} already.`
			);
		await moveVersion(tx, row, { state: 'withdrawn' });
		await appendAudit(tx, actor, {
			type: 'recipe.withdrawn',
			payload: { number: row.number },
			reason,
			...about(recipe, row.number)
		});
		await tellHolders(tx, recipe.id, (share) => ({
			subject: 'A recipe shared with your group was withdrawn',
			text: `A recipe version was withdrawn. Read the reason before it is used again.\n\nOpen it: ${link(`/shared/${share.id}`)}\n`
		}));
		await tellPerson(tx, row.authorId, {
			subject: 'A recipe version was withdrawn',
			text: `${actor.name} withdrew a recipe version.\n\nOpen it: ${link(`/recipes/${recipe.id}`)}\n`
		});
		return { state: 'withdrawn', version: row.version + 1 };
	});
}
