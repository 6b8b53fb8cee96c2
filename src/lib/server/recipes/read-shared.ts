import { Op } from 'sequelize';
import type { RecipeState } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { AuditEvent, Group, Recipe, RecipeVersion, Share, User } from '../database/models';
import { isId } from '../ids';
import { groupsWhere, requireCan, type Actor } from '../policy';
import { findShare } from './find-share';
import { versionView, type VersionView } from './version-view';

export interface SharedSummary {
	shareId: string;
	title: string;
	number: number;
	state: RecipeState;
	fromGroup: string;
	toGroup: string;
	sharedAt: Date;
	read: boolean;
}

export interface SharedView {
	shareId: string;
	groupId: string;
	fromGroup: string;
	toGroup: string;
	sharedBy: string;
	sharedAt: Date;
	shown: VersionView;
	/** A newer version that this group holds too. */
	newer: { shareId: string; number: number } | null;
	/** Why it was withdrawn. */
	withdrawn: { reason: string; by: string; at: string } | null;
	readByMe: string | null;
}

export interface SharedPage {
	items: SharedSummary[];
	next: string | null;
	total: number;
}

const titleOf = (version: RecipeVersion): string => (version.content as { title?: string }).title ?? '';

async function readShares(actor: Actor, shareIds: string[]): Promise<Set<string>> {
	const rows = await AuditEvent.findAll({
		where: { type: 'recipe.read', objectId: shareIds, userId: actor.userId },
		attributes: ['objectId']
	});
	return new Set(rows.map((r) => r.objectId ?? ''));
}

/** What other groups shared with the actor's group, newest first. */
export async function listShared(
	actor: Actor,
	input: { groupId: string; after?: string; limit?: number }
): Promise<SharedPage> {
	requireCan(actor, input.groupId, 'recipe.readShared', 'group');
	const limit = Math.min(Math.max(Math.trunc(input.limit ?? 25), 1), 100);
	const where = { groupId: input.groupId, endedAt: null };
	const [total, found] = await Promise.all([
		Share.count({ where }),
		Share.findAll({
			where: isId(input.after) ? { ...where, id: { [Op.lt]: input.after } } : where,
			order: [['id', 'DESC']],
			limit: limit + 1
		})
	]);
	const shares = found.slice(0, limit);
	const versions = await RecipeVersion.findAll({ where: { id: shares.map((s) => s.recipeVersionId) } });
	const recipes = await Recipe.findAll({ where: { id: versions.map((v) => v.recipeId) } });
	const [groups, read] = await Promise.all([
		Group.findAll({
			where: { id: [input.groupId, ...recipes.map((r) => r.groupId)] },
			attributes: ['id', 'name']
		}),
		readShares(
			actor,
			shares.map((s) => s.id)
		)
	]);
	const name = (id: string | undefined) => groups.find((g) => g.id === id)?.name ?? '';
	const items = shares.flatMap((share) => {
		const version = versions.find((v) => v.id === share.recipeVersionId);
		if (!version) return [];
		return [
			{
				shareId: share.id,
				title: titleOf(version),
				number: version.number,
				state: version.state,
				fromGroup: name(recipes.find((r) => r.id === version.recipeId)?.groupId),
				toGroup: name(share.groupId),
				sharedAt: share.createdAt,
				read: read.has(share.id)
			}
		];
	});
	return { items, next: found.length > limit ? (shares.at(-1)?.id ?? null) : null, total };
}

async function newerShare(
	actor: Actor,
	recipe: Recipe,
	version: RecipeVersion
): Promise<SharedView['newer']> {
	const later = await RecipeVersion.findAll({
		where: { recipeId: recipe.id, number: { [Op.gt]: version.number } },
		attributes: ['id', 'number'],
		order: [['number', 'DESC']]
	});
	const shares = await Share.findAll({
		where: {
			recipeVersionId: later.map((v) => v.id),
			groupId: groupsWhere(actor, 'recipe.readShared'),
			endedAt: null
		}
	});
	for (const candidate of later) {
		const share = shares.find((s) => s.recipeVersionId === candidate.id);
		if (share) return { shareId: share.id, number: candidate.number };
	}
	return null;
}

async function withdrawalOf(recipe: Recipe, version: RecipeVersion): Promise<SharedView['withdrawn']> {
	if (version.state !== 'withdrawn') return null;
	const entry = await AuditEvent.findOne({
		where: { type: 'recipe.withdrawn', objectId: recipe.id, objectVersion: version.number },
		order: [['seq', 'DESC']]
	});
	return { reason: entry?.reason ?? '', by: entry?.printedName ?? '', at: entry?.at ?? '' };
}

/** Comments and inner history stay with the owner; the reader sees the record and who signed it. */
export async function readShared(actor: Actor, shareId: string): Promise<SharedView> {
	const { share, version, recipe } = await findShare(actor, shareId);
	const [shown, groups, sharer, newer, withdrawn, mine] = await Promise.all([
		versionView(recipe, version),
		Group.findAll({ where: { id: [share.groupId, recipe.groupId] }, attributes: ['id', 'name'] }),
		User.findByPk(share.sharedById, { attributes: ['id', 'name'] }),
		newerShare(actor, recipe, version),
		withdrawalOf(recipe, version),
		AuditEvent.findOne({ where: { type: 'recipe.read', objectId: share.id, userId: actor.userId } })
	]);
	const name = (id: string) => groups.find((g) => g.id === id)?.name ?? '';
	return {
		shareId: share.id,
		groupId: share.groupId,
		fromGroup: name(recipe.groupId),
		toGroup: name(share.groupId),
		sharedBy: sharer?.name ?? 'somebody who has left',
		sharedAt: share.createdAt,
		shown: {
			...shown,
			cautions: shown.cautions.map((c) => ({
				...c,
				readBy: c.readBy.filter((r) => r.groupId === share.groupId)
			}))
		},
		newer,
		withdrawn,
		readByMe: mine?.at ?? null
	};
}

/** A reader says to have read the version; its owner sees who and when under "Held by". */
export async function markSharedRead(actor: Actor, shareId: string): Promise<void> {
	await write(async (tx) => {
		const { share, version, recipe } = await findShare(actor, shareId, tx);
		requireCan(actor, share.groupId, 'recipe.acknowledge', 'shared recipe');
		const before = await AuditEvent.findOne({
			where: { type: 'recipe.read', objectId: share.id, userId: actor.userId },
			transaction: tx
		});
		if (before) return;
		await appendAudit(tx, actor, {
			type: 'recipe.read',
			payload: { number: version.number },
			groupId: recipe.groupId,
			studyId: recipe.studyId,
			objectType: 'share',
			objectId: share.id,
			objectVersion: version.number
		});
	});
}
