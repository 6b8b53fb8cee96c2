import { recipeContent } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { CautionAcknowledgement, Fit, Recipe, type RecipeVersion } from '../database/models';
import { AppError, notFound } from '../errors';
import { requireCan, type Actor } from '../policy';
import { about } from './audit';
import { cautionsOf } from './caution-facts';
import { findRecipe, findVersion } from './find';
import { findShare } from './find-share';

export type AcknowledgeInput =
	{ recipeId: string; number: number; cautionKey: string } | { shareId: string; cautionKey: string };

interface Place {
	recipe: Recipe;
	version: RecipeVersion;
	/** Group as whose member the person reads. */
	groupId: string;
}

async function placeOf(actor: Actor, input: AcknowledgeInput): Promise<Place> {
	if ('shareId' in input) {
		const { share, recipe, version } = await findShare(actor, input.shareId);
		requireCan(actor, share.groupId, 'recipe.acknowledge', 'shared recipe');
		return { recipe, version, groupId: share.groupId };
	}
	const recipe = await findRecipe(actor, input.recipeId, 'recipe.acknowledge');
	return { recipe, version: await findVersion(recipe, input.number), groupId: recipe.groupId };
}

/** Records that a person read a caution: "read", never "accepted". It falls away when the caution's inputs change. */
export async function acknowledgeCaution(actor: Actor, input: AcknowledgeInput): Promise<void> {
	const { recipe, version, groupId } = await placeOf(actor, input);
	const fit = await Fit.findByPk(version.fitId);
	if (!fit) throw notFound('fit');
	const present = await cautionsOf(recipeContent.parse(version.content), fit);
	if (!present.some((c) => c.key === input.cautionKey))
		throw new AppError('conflict', 'This caution has changed since the page was loaded. Read it again.');
	await write(async (tx) => {
		const entry = {
			recipeVersionId: version.id,
			cautionKey: input.cautionKey,
			userId: actor.userId
		};
		if (await CautionAcknowledgement.findOne({ where: entry, transaction: tx })) return;
		await CautionAcknowledgement.create({ ...entry, printedName: actor.name, groupId }, { transaction: tx });
		await appendAudit(tx, actor, {
			type: 'recipe.caution-read',
			payload: { number: version.number, cautionKey: input.cautionKey },
			...about(recipe, version.number)
		});
	});
}
