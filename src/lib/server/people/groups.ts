import { fn, col } from 'sequelize';
import { z } from 'zod';
import { groupChangeForm, groupForm } from '$lib/schemas/people';
import { appendAudit } from '../audit/append';
import { write, type Tx } from '../database';
import { Group, Membership } from '../database/models';
import { AppError, notFound, versionChanged } from '../errors';
import { requireSiteAdmin, type Actor } from '../policy';
import { checkReason } from './reason';

export interface GroupSummary {
	id: string;
	name: string;
	gxp: boolean;
	version: number;
	members: number;
	createdAt: Date;
}

/** Every group of the site with its number of members: names only, no content. */
export async function listGroups(actor: Actor): Promise<GroupSummary[]> {
	requireSiteAdmin(actor);
	const [groups, counts] = await Promise.all([
		Group.findAll({ order: [['name', 'ASC']] }),
		Membership.findAll({
			attributes: ['groupId', [fn('COUNT', col('id')), 'members']],
			group: ['groupId'],
			raw: true
		}) as unknown as Promise<{ groupId: string; members: number }[]>
	]);
	const byGroup = new Map(counts.map((c) => [c.groupId, Number(c.members)]));
	return groups.map(({ id, name, gxp, version, createdAt }) => ({
		id,
		name,
		gxp,
		version,
		createdAt,
		members: byGroup.get(id) ?? 0
	}));
}

async function refuseTakenName(tx: Tx, name: string, except?: string): Promise<void> {
	const groups = await Group.findAll({ transaction: tx });
	if (!groups.some((g) => g.id !== except && g.name.toLowerCase() === name.toLowerCase())) return;
	const message = 'There is a group of this name already.';
	throw new AppError('conflict', message, { fields: [{ field: 'name', message }] });
}

export function createGroup(actor: Actor, input: z.input<typeof groupForm>): Promise<{ id: string }> {
	requireSiteAdmin(actor);
	const { name, gxp } = groupForm.parse(input);
	return write(async (tx) => {
		await refuseTakenName(tx, name);
		const group = await Group.create({ name, gxp }, { transaction: tx });
		await appendAudit(tx, actor, {
			type: 'group.created',
			groupId: group.id,
			objectType: 'group',
			objectId: group.id,
			objectVersion: group.version,
			payload: { name, gxp }
		});
		return { id: group.id };
	});
}

/** Renames a group or changes whether it works under GxP; leaving GxP needs a reason, as does every change under it. */
export function changeGroup(actor: Actor, input: z.input<typeof groupChangeForm>): Promise<void> {
	requireSiteAdmin(actor);
	const { groupId, version, name, gxp, reason } = groupChangeForm.parse(input);
	return write(async (tx) => {
		const group = await Group.findByPk(groupId, { transaction: tx });
		if (!group) throw notFound('group');
		if (group.version !== version)
			throw versionChanged({ version: group.version, name: group.name, gxp: group.gxp });
		if (group.name === name && group.gxp === gxp) return;
		const why = checkReason(group.gxp, reason);
		await refuseTakenName(tx, name, group.id);
		const from = { name: group.name, gxp: group.gxp };
		const [changed] = await Group.update(
			{ name, gxp, version: version + 1 },
			{ where: { id: groupId, version }, transaction: tx }
		);
		if (changed !== 1) throw versionChanged({});
		await appendAudit(tx, actor, {
			type: 'group.changed',
			groupId,
			objectType: 'group',
			objectId: groupId,
			objectVersion: version + 1,
			payload: { from, to: { name, gxp } },
			reason: why
		});
	});
}
