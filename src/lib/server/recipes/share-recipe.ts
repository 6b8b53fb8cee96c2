import { Op } from 'sequelize';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { Group, RecipeVersion, Share } from '../database/models';
import { AppError, notFound } from '../errors';
import { isId } from '../ids';
import type { Actor } from '../policy';
import { about } from './audit';
import { findRecipe, findVersion, wrongState } from './find';
import { link, tellGroup } from './mail';

export interface ShareInput {
	recipeId: string;
	number: number;
	groupId: string;
}

/** Groups that a recipe can be shared with: every one but its own, by name. */
export async function shareTargets(actor: Actor, recipeId: string): Promise<{ id: string; name: string }[]> {
	const recipe = await findRecipe(actor, recipeId, 'recipe.share');
	const groups = await Group.findAll({
		where: { id: { [Op.ne]: recipe.groupId } },
		attributes: ['id', 'name'],
		order: [['name', 'ASC']]
	});
	return groups.map(({ id, name }) => ({ id, name }));
}

/** Shares exactly one validated version with a group, read-only; its members get a link and no chemistry. */
export async function shareRecipe(actor: Actor, input: ShareInput): Promise<{ shareId: string }> {
	await findRecipe(actor, input.recipeId, 'recipe.share');
	return write(async (tx) => {
		const recipe = await findRecipe(actor, input.recipeId, 'recipe.share', tx);
		const row = await findVersion(recipe, input.number, tx);
		if (row.state !== 'validated')
			throw wrongState(`Version ${row.number} is ${row.state}; only a validated version can be shared.`);
		const group = isId(input.groupId) ? await Group.findByPk(input.groupId, { transaction: tx }) : null;
		if (!group || group.id === recipe.groupId) throw notFound('other group');
		const open = await Share.findOne({
			where: { recipeVersionId: row.id, groupId: group.id, endedAt: null },
			transaction: tx
		});
		if (open) throw new AppError('conflict', `${group.name} holds version ${row.number} already.`);
		const share = await Share.create(
			{ recipeVersionId: row.id, groupId: group.id, sharedById: actor.userId },
			{ transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'recipe.shared',
			payload: { number: row.number, withGroupId: group.id, withGroupName: group.name },
			...about(recipe, row.number)
		});
		await tellGroup(tx, group.id, {
			subject: 'A recipe was shared with your group',
			text: `${actor.name} shared a recipe version with ${group.name}.\n\nOpen it: ${link(`/shared/${share.id}`)}\n`
		});
		return { shareId: share.id };
	});
}

/** Ends a share: the group no longer sees the version; what was read stays on the audit trail. */
export async function endShare(actor: Actor, input: { recipeId: string; shareId: string }): Promise<void> {
	await findRecipe(actor, input.recipeId, 'recipe.share');
	await write(async (tx) => {
		const recipe = await findRecipe(actor, input.recipeId, 'recipe.share', tx);
		const share = isId(input.shareId) ? await Share.findByPk(input.shareId, { transaction: tx }) : null;
		const version = share
			? await RecipeVersion.findOne({
					where: { id: share.recipeVersionId, recipeId: recipe.id },
					transaction: tx
				})
			: null;
		if (!share || !version) throw notFound('share');
		const group = await Group.findByPk(share.groupId, { transaction: tx });
		const [count] = await Share.update(
			{ endedAt: new Date() },
			{ where: { id: share.id, endedAt: null }, transaction: tx }
		);
		if (count !== 1) throw new AppError('conflict', 'This share was ended already.');
		await appendAudit(tx, actor, {
			type: 'recipe.share-ended',
			payload: {
				number: version.number,
				withGroupId: share.groupId,
				withGroupName: group?.name ?? ''
			},
			...about(recipe, version.number)
		});
	});
}
