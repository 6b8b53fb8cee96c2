import { mayMove } from '$lib/recipe/states';
import { recipeContent } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import { write, type Tx } from '../database';
import { Fit, RecipeVersion, type Recipe } from '../database/models';
import { AppError, notAllowed } from '../errors';
import type { Actor } from '../policy';
import { about } from './audit';
import { askPassword } from './ask-password';
import { confirm, type Confirmation } from './confirmation';
import { findRecipe, findVersion, moveVersion, newer, wrongState } from './find';
import { link, tellHolders, tellPerson } from './mail';
import { requireSameVersion, writeSignature, type SignInput } from './sign';

/** Nobody signs off own work: the author, and whoever else wrote content of this version, is refused. */
export function wrote(actor: Actor, version: RecipeVersion): boolean {
	return version.authorId === actor.userId || version.contributorIds.includes(actor.userId);
}

function requireReviewable(actor: Actor, version: RecipeVersion, input: SignInput): void {
	if (wrote(actor, version))
		throw notAllowed('You wrote this version, so another group lead has to validate it.');
	if (version.version !== input.version) throw newer(version);
	if (!mayMove(version.state, 'validate'))
		throw wrongState(
			`Version ${version.number} is ${version.state}; only a version in review can be validated.`
		);
}

async function confirmationOf(version: RecipeVersion, tx?: Tx): Promise<Confirmation> {
	const { confirmationRunId } = recipeContent.parse(version.content);
	if (!confirmationRunId)
		throw new AppError(
			'invalid',
			'No confirmation run is chosen. Return the version and ask for a run that the fit has not seen: without one nothing was predicted.'
		);
	const fit = await Fit.findByPk(version.fitId, { transaction: tx });
	if (!fit) throw wrongState('The fit behind this version cannot be found.');
	return confirm(fit, confirmationRunId, tx);
}

function requireComment(confirmation: Confirmation, comment: string | undefined): void {
	if (!confirmation.needsComment || (comment?.match(/\p{L}/gu) ?? []).length >= 20) return;
	throw new AppError(
		'invalid',
		`Only ${confirmation.inside} of ${confirmation.total} points lie inside the 95 % prediction band. Say in the comment (at least twenty letters) why the recipe may still be validated, or return it.`,
		{ fields: [{ field: 'comment', message: 'A comment is needed.' }] }
	);
}

async function supersedeEarlier(tx: Tx, actor: Actor, recipe: Recipe, by: RecipeVersion): Promise<void> {
	const earlier = await RecipeVersion.findAll({
		where: { recipeId: recipe.id, state: 'validated' },
		transaction: tx
	});
	for (const version of earlier) {
		await moveVersion(tx, version, { state: 'superseded' });
		await appendAudit(tx, actor, {
			type: 'recipe.superseded',
			payload: { number: version.number, by: by.number },
			...about(recipe, version.number)
		});
	}
	if (earlier.length === 0) return;
	await tellHolders(tx, recipe.id, (share) => ({
		subject: 'A recipe shared with your group has a newer version',
		text: `A version that your group holds was superseded.\n\nOpen it: ${link(`/shared/${share.id}`)}\n`
	}));
}

/**
 * Signs a version "Validated": the kinetics predicted an unused run, and a group lead who wrote none of it signs
 * exactly what was on the screen. Not process validation.
 */
export async function validateRecipe(
	actor: Actor,
	input: SignInput
): Promise<{ state: string; version: number; confirmation: Confirmation }> {
	const seen = await findRecipe(actor, input.recipeId, 'recipe.validate');
	const before = await findVersion(seen, input.number);
	requireReviewable(actor, before, input);
	requireSameVersion(seen, before, input);
	requireComment(await confirmationOf(before), input.comment);
	await askPassword(actor, seen, before.number, input.password);
	return write(async (tx) => {
		const recipe = await findRecipe(actor, input.recipeId, 'recipe.validate', tx);
		const row = await findVersion(recipe, input.number, tx);
		requireReviewable(actor, row, input);
		requireSameVersion(recipe, row, input);
		const confirmation = await confirmationOf(row, tx);
		requireComment(confirmation, input.comment);
		await supersedeEarlier(tx, actor, recipe, row);
		await moveVersion(tx, row, { state: 'validated' });
		await writeSignature(tx, actor, recipe, row, {
			meaning: 'Validated',
			comment: input.comment,
			detail: { confirmation }
		});
		await tellPerson(tx, row.authorId, {
			subject: 'A recipe version was signed',
			text: `${actor.name} signed a recipe version that you wrote.\n\nOpen it: ${link(`/recipes/${recipe.id}`)}\n`
		});
		return { state: 'validated', version: row.version + 1, confirmation };
	});
}
