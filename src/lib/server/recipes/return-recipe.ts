import { mayMove } from '$lib/recipe/states';
import { commentText } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { ReviewComment } from '../database/models';
import type { Actor } from '../policy';
import { about } from './audit';
import { findRecipe, findVersion, moveVersion, newer, wrongState } from './find';
import { link, tellPerson } from './mail';

export interface ReturnInput {
	recipeId: string;
	number: number;
	version: number;
	comment: string;
}

/** A group lead gives a version back to its author, saying what has to change. */
export async function returnRecipe(
	actor: Actor,
	input: ReturnInput
): Promise<{ state: string; version: number }> {
	await findRecipe(actor, input.recipeId, 'recipe.return');
	const comment = commentText.parse(input.comment);
	return write(async (tx) => {
		const recipe = await findRecipe(actor, input.recipeId, 'recipe.return', tx);
		const row = await findVersion(recipe, input.number, tx);
		if (row.version !== input.version) throw newer(row);
		if (!mayMove(row.state, 'return'))
			throw wrongState(`Version ${row.number} is ${row.state}; only a version in review can be returned.`);
		await moveVersion(tx, row, { state: 'returned' });
		await ReviewComment.create(
			{ recipeVersionId: row.id, userId: actor.userId, printedName: actor.name, text: comment },
			{ transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'recipe.returned',
			payload: { number: row.number, comment },
			...about(recipe, row.number)
		});
		await tellPerson(tx, row.authorId, {
			subject: 'A recipe came back from review',
			text: `${actor.name} returned a recipe version with a comment.\n\nOpen it: ${link(`/recipes/${recipe.id}`)}\n`
		});
		return { state: 'returned', version: row.version + 1 };
	});
}
