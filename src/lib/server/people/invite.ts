import { z } from 'zod';
import { adminInviteForm, inviteForm } from '$lib/schemas/people';
import { appendAudit } from '../audit/append';
import { newSecret, secretHash } from '../auth/secrets';
import { write, type Tx } from '../database';
import { Group, Invitation, Membership, User } from '../database/models';
import { AppError, notFound } from '../errors';
import { queueMail } from '../mail/queue';
import { requireCan, requireSiteAdmin, type Actor, type Role } from '../policy';
import { settings } from '../settings';

const VALID_DAYS = 7;

interface Wanted {
	email: string;
	groupId: string | null;
	role: Role | null;
	siteAdmin: boolean;
}

const emailRefused = (message: string): AppError =>
	new AppError('conflict', message, { fields: [{ field: 'email', message }] });

async function refuseNeedless(tx: Tx, actor: Actor, wanted: Wanted): Promise<void> {
	if (wanted.email === actor.email.toLowerCase())
		throw emailRefused('Nobody invites themselves. Somebody else has to.');
	const user = await User.findOne({ where: { email: wanted.email }, transaction: tx });
	if (!user) return;
	if (user.disabledAt) throw emailRefused('This person is disabled. A site admin can enable them again.');
	const where = { userId: user.id, groupId: wanted.groupId ?? '' };
	if (wanted.groupId && (await Membership.findOne({ where, transaction: tx })))
		throw emailRefused('This person is a member already. Change the role in the list of members.');
	if (!wanted.groupId && user.siteAdmin) throw emailRefused('This person is a site admin already.');
}

/** One open invitation an address and group: a new one ends the one before. */
async function endEarlier(tx: Tx, wanted: Wanted): Promise<void> {
	await Invitation.update(
		{ revokedAt: new Date() },
		{
			where: { email: wanted.email, groupId: wanted.groupId, usedAt: null, revokedAt: null },
			transaction: tx
		}
	);
}

async function invite(tx: Tx, actor: Actor, wanted: Wanted): Promise<string> {
	await refuseNeedless(tx, actor, wanted);
	await endEarlier(tx, wanted);
	const secret = newSecret();
	const expiresAt = new Date(Date.now() + VALID_DAYS * 24 * 3600 * 1000);
	const row = await Invitation.create(
		{ ...wanted, tokenHash: secretHash(secret), expiresAt, invitedById: actor.userId },
		{ transaction: tx }
	);
	await appendAudit(tx, actor, {
		type: 'member.invited',
		groupId: wanted.groupId,
		objectType: 'invitation',
		objectId: row.id,
		payload: {
			email: wanted.email,
			role: wanted.siteAdmin && !wanted.groupId ? 'site_admin' : wanted.role,
			expiresAt: expiresAt.toISOString()
		}
	});
	await queueMail(tx, {
		to: wanted.email,
		subject: `${actor.name} invites you to ${settings().SITE_NAME}`,
		text:
			`${actor.name} (${actor.email}) invites you to ${settings().SITE_NAME}.\n` +
			`Accept within ${VALID_DAYS} days, with this link, which works once:\n\n` +
			`${settings().ORIGIN}/invitation/${secret}\n\n` +
			`If you do not expect this, leave it: without the link nothing happens.\n`
	});
	return row.id;
}

/** A group lead invites somebody into the own group. */
export function inviteMember(
	actor: Actor,
	input: { groupId: string } & z.input<typeof inviteForm>
): Promise<{ id: string }> {
	requireCan(actor, input.groupId, 'members.invite', 'group');
	const { email, role } = inviteForm.parse(input);
	return write(async (tx) => ({
		id: await invite(tx, actor, { email, role, groupId: input.groupId, siteAdmin: false })
	}));
}

/** A site admin invites somebody into any group, or as another site admin. */
export function inviteAsAdmin(actor: Actor, input: z.input<typeof adminInviteForm>): Promise<{ id: string }> {
	requireSiteAdmin(actor);
	const { email, role, groupId, siteAdmin } = adminInviteForm.parse(input);
	return write(async (tx) => {
		if (groupId && !(await Group.findByPk(groupId, { transaction: tx }))) throw notFound('group');
		const wanted: Wanted = {
			email,
			groupId: groupId || null,
			role: groupId ? role : null,
			siteAdmin
		};
		return { id: await invite(tx, actor, wanted) };
	});
}

/** A lead takes back an invitation of the own group; a site admin any. Somebody else's is not there. */
export function revokeInvitation(actor: Actor, invitationId: string): Promise<void> {
	return write(async (tx) => {
		const row = await Invitation.findByPk(invitationId, { transaction: tx });
		if (!row || row.usedAt || row.revokedAt) throw notFound('invitation');
		if (!row.groupId || (actor.siteAdmin && !actor.scopes)) requireSiteAdmin(actor);
		else requireCan(actor, row.groupId, 'members.invite', 'invitation');
		await row.update({ revokedAt: new Date() }, { transaction: tx });
		await appendAudit(tx, actor, {
			type: 'member.invitation-revoked',
			groupId: row.groupId,
			objectType: 'invitation',
			objectId: row.id,
			payload: { email: row.email }
		});
	});
}

export interface InvitationView {
	id: string;
	email: string;
	role: Role | null;
	siteAdmin: boolean;
	groupId: string | null;
	expiresAt: Date;
	expired: boolean;
}

const MOST_SHOWN = 200;

/** Invitations that were neither accepted nor taken back, newest first. */
async function stillOpen(where: { groupId?: string }): Promise<InvitationView[]> {
	const rows = await Invitation.findAll({
		where: { ...where, usedAt: null, revokedAt: null },
		order: [['id', 'DESC']],
		limit: MOST_SHOWN
	});
	const now = new Date();
	return rows.map((row) => ({
		id: row.id,
		email: row.email,
		role: row.role,
		siteAdmin: row.siteAdmin,
		groupId: row.groupId,
		expiresAt: row.expiresAt,
		expired: row.expiresAt <= now
	}));
}

/** Open invitations into one group; the caller has asked whether the actor may see them. */
export const openInvitations = (groupId: string): Promise<InvitationView[]> => stillOpen({ groupId });

/** Every open invitation of the site. */
export async function listInvitations(actor: Actor): Promise<InvitationView[]> {
	requireSiteAdmin(actor);
	return stillOpen({});
}
