import { z } from 'zod';
import { removeForm, roleForm } from '$lib/schemas/people';
import { appendAudit } from '../audit/append';
import { write, type Tx } from '../database';
import { Group, Membership, User } from '../database/models';
import { AppError, notFound } from '../errors';
import { can, requireCan, type Actor, type Role } from '../policy';
import { openInvitations, type InvitationView } from './invite';
import { checkReason } from './reason';
import { readSiteSettings } from './site-settings';

export interface MemberView {
	userId: string;
	name: string;
	email: string;
	role: Role;
	disabled: boolean;
	since: Date;
}

export interface GroupView {
	id: string;
	name: string;
	gxp: boolean;
	/** Gap in the mass balance that is noted while sheets are read, ± % of the charge; null: as the site has it. */
	massBalancePercent: number | null;
	siteMassBalancePercent: number;
	version: number;
	members: MemberView[];
	invitations: InvitationView[];
	canManage: boolean;
	canSetLimits: boolean;
}

async function membersOf(groupId: string): Promise<MemberView[]> {
	const rows = await Membership.findAll({ where: { groupId } });
	const users = await User.findAll({ where: { id: rows.map((m) => m.userId) }, order: [['name', 'ASC']] });
	return users.map((user) => {
		const membership = rows.find((m) => m.userId === user.id)!;
		return {
			userId: user.id,
			name: user.name,
			email: user.email,
			role: membership.role,
			disabled: user.disabledAt !== null,
			since: membership.createdAt
		};
	});
}

/** The group with its members; open invitations are for those who may invite. */
export async function readGroup(actor: Actor, groupId: string): Promise<GroupView> {
	requireCan(actor, groupId, 'members.read', 'group');
	const canManage = can(actor, groupId, 'members.invite');
	const [group, members, invitations, site] = await Promise.all([
		Group.findByPk(groupId),
		membersOf(groupId),
		canManage ? openInvitations(groupId) : [],
		readSiteSettings()
	]);
	if (!group) throw notFound('group');
	const { id, name, gxp, massBalancePercent, version } = group;
	const { massBalancePercent: siteMassBalancePercent } = site.thresholds;
	const limits = {
		massBalancePercent,
		siteMassBalancePercent,
		canSetLimits: can(actor, groupId, 'group.limits')
	};
	return { id, name, gxp, version, members, invitations, canManage, ...limits };
}

/** A group always keeps one active lead: else nobody could sign for it or invite into it. */
async function keepALead(tx: Tx, groupId: string, leaving: string): Promise<void> {
	const leads = await Membership.findAll({ where: { groupId, role: 'group_lead' }, transaction: tx });
	const others = leads.map((m) => m.userId).filter((id) => id !== leaving);
	const active = await User.count({ where: { id: others, disabledAt: null }, transaction: tx });
	if (active === 0)
		throw new AppError(
			'conflict',
			'This is the only group lead. Make somebody else group lead first, then try again.'
		);
}

async function memberOf(tx: Tx, groupId: string, userId: string) {
	const [group, membership, user] = [
		await Group.findByPk(groupId, { transaction: tx }),
		await Membership.findOne({ where: { groupId, userId }, transaction: tx }),
		await User.findByPk(userId, { transaction: tx })
	];
	if (!group || !membership || !user) throw notFound('member');
	return { group, membership, user };
}

export function changeRole(
	actor: Actor,
	input: { groupId: string } & z.input<typeof roleForm>
): Promise<void> {
	requireCan(actor, input.groupId, 'members.invite', 'group');
	const { userId, role, reason } = roleForm.parse(input);
	return write(async (tx) => {
		const { group, membership, user } = await memberOf(tx, input.groupId, userId);
		if (membership.role === role) return;
		const why = checkReason(group.gxp, reason);
		if (membership.role === 'group_lead') await keepALead(tx, group.id, userId);
		const from = membership.role;
		await membership.update({ role }, { transaction: tx });
		await appendAudit(tx, actor, {
			type: 'member.role-changed',
			groupId: group.id,
			objectType: 'person',
			objectId: user.id,
			payload: { name: user.name, from, to: role },
			reason: why
		});
	});
}

/** Takes a person out of the group. What they did and signed stays, under the name that they had. */
export function removeMember(
	actor: Actor,
	input: { groupId: string } & z.input<typeof removeForm>
): Promise<void> {
	requireCan(actor, input.groupId, 'members.invite', 'group');
	const { userId, reason } = removeForm.parse(input);
	return write(async (tx) => {
		const { group, membership, user } = await memberOf(tx, input.groupId, userId);
		const why = checkReason(group.gxp, reason);
		if (membership.role === 'group_lead') await keepALead(tx, group.id, userId);
		await membership.destroy({ transaction: tx });
		await appendAudit(tx, actor, {
			type: 'member.removed',
			groupId: group.id,
			objectType: 'person',
			objectId: user.id,
			payload: { name: user.name, role: membership.role },
			reason: why
		});
	});
}
