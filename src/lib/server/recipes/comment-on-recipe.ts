import { commentText } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { ReviewComment } from '../database/models';
import type { Actor } from '../policy';
import { about } from './audit';
import { findRecipe, findVersion } from './find';

export interface CommentInput {
	recipeId: string;
	number: number;
	text: string;
	/** What it is pinned to: a section, or section and entry such as "setPoints/temperature". */
	anchor?: string | null;
}

const ANCHOR = /^[A-Za-z]+(\/[A-Za-z0-9_-]{1,40})?$/;

/** A comment of a reviewer or author on one version, pinned to the place that it speaks of. */
export async function commentOnRecipe(actor: Actor, input: CommentInput): Promise<{ id: string }> {
	await findRecipe(actor, input.recipeId, 'recipe.comment');
	const text = commentText.parse(input.text);
	const anchor = input.anchor && ANCHOR.test(input.anchor) ? input.anchor : null;
	return write(async (tx) => {
		const recipe = await findRecipe(actor, input.recipeId, 'recipe.comment', tx);
		const row = await findVersion(recipe, input.number, tx);
		const comment = await ReviewComment.create(
			{ recipeVersionId: row.id, userId: actor.userId, printedName: actor.name, text, anchor },
			{ transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'recipe.commented',
			payload: { number: row.number, comment: text, anchor },
			...about(recipe, row.number)
		});
		return { id: comment.id };
	});
}
