import type { Meaning } from '$lib/schemas/recipe';
import { recipeContent } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import type { Tx } from '../database';
import { Signature, User, type Recipe, type RecipeVersion } from '../database/models';
import type { Actor } from '../policy';
import { about } from './audit';
import { newer } from './find';
import { versionHash } from './signed-record';

export interface SignInput {
	recipeId: string;
	number: number;
	/** Version and hash that the person had before them. */
	version: number;
	contentHash: string;
	password: string;
	comment?: string;
}

/** The version must still be the one that the person saw, to the last digit, and its stored hash must be its own. */
export function requireSameVersion(recipe: Recipe, version: RecipeVersion, input: SignInput): void {
	const fresh = versionHash({
		recipeId: recipe.id,
		number: version.number,
		fitId: version.fitId,
		windowId: version.windowId,
		content: recipeContent.parse(version.content)
	});
	const seen = input.version === version.version && input.contentHash === version.contentHash;
	if (!seen || fresh !== version.contentHash) throw newer(version);
}

/** Records printed name, UTC time and meaning on the exact version (21 CFR 11.50, 11.70). */
export async function writeSignature(
	tx: Tx,
	actor: Actor,
	recipe: Recipe,
	version: RecipeVersion,
	signature: { meaning: Meaning; comment?: string; detail?: unknown }
): Promise<void> {
	// The printed name is the one at signing: a later change of name leaves it as it was.
	const user = await User.findByPk(actor.userId, { attributes: ['id', 'name'], transaction: tx });
	const printedName = user?.name ?? actor.name;
	await Signature.create(
		{
			recipeVersionId: version.id,
			userId: actor.userId,
			printedName,
			meaning: signature.meaning,
			contentHash: version.contentHash,
			comment: signature.comment?.trim() || null,
			detail: signature.detail ?? null,
			signedAt: new Date()
		},
		{ transaction: tx }
	);
	await appendAudit(tx, actor, {
		type: 'recipe.signed',
		payload: {
			number: version.number,
			meaning: signature.meaning,
			contentHash: version.contentHash,
			printedName
		},
		...about(recipe, version.number)
	});
}
