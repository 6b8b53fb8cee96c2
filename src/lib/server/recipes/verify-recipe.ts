import { mayBeVerified } from '$lib/recipe/states';
import { write, type Tx } from '../database';
import { Signature, type Recipe, type RecipeVersion } from '../database/models';
import { AppError, notAllowed } from '../errors';
import type { Actor } from '../policy';
import { askPassword } from './ask-password';
import { findRecipe, findVersion, wrongState } from './find';
import { requireSameVersion, writeSignature, type SignInput } from './sign';
import { wrote } from './validate-recipe';

async function requireVerifiable(
	actor: Actor,
	recipe: Recipe,
	version: RecipeVersion,
	input: SignInput,
	tx?: Tx
): Promise<void> {
	if (wrote(actor, version))
		throw notAllowed('You wrote content of this version, so somebody else has to verify it.');
	if (!mayBeVerified(version.state))
		throw wrongState(
			`Version ${version.number} is ${version.state}; it is verified after a group lead validated it.`
		);
	requireSameVersion(recipe, version, input);
	const own = await Signature.findAll({
		where: { recipeVersionId: version.id, userId: actor.userId },
		attributes: ['meaning'],
		transaction: tx
	});
	const signed = own.map((signature) => signature.meaning);
	if (signed.includes('Verified'))
		throw new AppError('conflict', 'You signed this version “Verified” already.');
	// A role that changed in between does not make one person two.
	if (signed.length > 0)
		throw notAllowed(`You signed this version “${signed[0]}”, so somebody else has to verify it.`);
}

/** QA signs "Verified": records, signatures and audit trail of exactly this version were checked. */
export async function verifyRecipe(actor: Actor, input: SignInput): Promise<{ state: string }> {
	const seen = await findRecipe(actor, input.recipeId, 'recipe.verify');
	const before = await findVersion(seen, input.number);
	await requireVerifiable(actor, seen, before, input);
	await askPassword(actor, seen, before.number, input.password);
	return write(async (tx) => {
		const recipe = await findRecipe(actor, input.recipeId, 'recipe.verify', tx);
		const row = await findVersion(recipe, input.number, tx);
		await requireVerifiable(actor, recipe, row, input, tx);
		await writeSignature(tx, actor, recipe, row, { meaning: 'Verified', comment: input.comment });
		return { state: row.state };
	});
}
