import { z } from 'zod';
import { joinForm } from '$lib/schemas/people';
import { appendAudit, type AuditActor } from '../audit/append';
import { asPerson } from '../auth/actor';
import { hashPassword } from '../auth/password';
import { secretHash } from '../auth/secrets';
import { write, type Tx } from '../database';
import { Group, Invitation, Membership, User } from '../database/models';
import { AppError, notAllowed } from '../errors';
import type { Actor, Role } from '../policy';
import { refuseObvious } from './account';

const gone = (): AppError =>
	new AppError(
		'not-found',
		'This invitation was used, taken back or has expired. Ask the person who invited you for a new one.'
	);

const isOpen = (row: Invitation | null): row is Invitation =>
	row !== null && !row.usedAt && !row.revokedAt && row.expiresAt > new Date();

export interface InvitationPage {
	email: string;
	groupName: string | null;
	role: Role | null;
	siteAdmin: boolean;
	/** Whether the address belongs to somebody with a password, who joins by signing in. */
	known: boolean;
}

/** What an invitation link opens. */
export async function readInvitation(secret: string): Promise<InvitationPage> {
	const row = await Invitation.findOne({ where: { tokenHash: secretHash(secret) } });
	if (!isOpen(row)) throw gone();
	const [group, user] = await Promise.all([
		row.groupId ? Group.findByPk(row.groupId) : null,
		User.findOne({ where: { email: row.email } })
	]);
	return {
		email: row.email,
		groupName: group?.name ?? null,
		role: row.role,
		siteAdmin: row.siteAdmin,
		known: Boolean(user?.passwordHash)
	};
}

/** Marks the invitation used, in a conditional update, so that a link never works twice. */
async function use(tx: Tx, secret: string): Promise<Invitation> {
	const row = await Invitation.findOne({ where: { tokenHash: secretHash(secret) }, transaction: tx });
	if (!isOpen(row)) throw gone();
	const [changed] = await Invitation.update(
		{ usedAt: new Date() },
		{ where: { id: row.id, usedAt: null, revokedAt: null }, transaction: tx }
	);
	if (changed !== 1) throw gone();
	return row;
}

async function grant(tx: Tx, actor: AuditActor, user: User, row: Invitation): Promise<void> {
	if (row.siteAdmin && !user.siteAdmin) {
		await user.update({ siteAdmin: true }, { transaction: tx });
		await appendAudit(tx, actor, {
			type: 'person.admin-changed',
			objectType: 'person',
			objectId: user.id,
			payload: { siteAdmin: true }
		});
	}
	if (!row.groupId || !row.role) return;
	const where = { userId: user.id, groupId: row.groupId };
	if (await Membership.findOne({ where, transaction: tx })) return;
	await Membership.create({ ...where, role: row.role }, { transaction: tx });
	await appendAudit(tx, actor, {
		type: 'member.joined',
		groupId: row.groupId,
		objectType: 'person',
		objectId: user.id,
		payload: { name: user.name, role: row.role }
	});
}

/** A person made beforehand (the first site admin) only sets a password; anybody else is new. */
function noteArrival(tx: Tx, user: User, madeBefore: boolean): Promise<void> {
	const about = { objectType: 'person', objectId: user.id };
	if (madeBefore)
		return appendAudit(tx, asPerson(user), {
			...about,
			type: 'person.password-changed',
			payload: { by: 'invitation' }
		});
	return appendAudit(tx, asPerson(user), {
		...about,
		type: 'person.created',
		payload: { email: user.email, name: user.name, siteAdmin: user.siteAdmin }
	});
}

/** A new person takes the invitation up: name and password are theirs, the e-mail address is the invited one. */
export async function acceptInvitation(
	secret: string,
	input: z.input<typeof joinForm>
): Promise<{ email: string }> {
	const { name, password } = joinForm.parse(input);
	const invited = await readInvitation(secret);
	if (invited.known)
		throw new AppError('conflict', 'There is an account with this address already. Sign in to join.');
	refuseObvious(password, { email: invited.email, name });
	const passwordHash = await hashPassword(password);
	return write(async (tx) => {
		const row = await use(tx, secret);
		const existing = await User.findOne({ where: { email: row.email }, transaction: tx });
		if (existing?.passwordHash || existing?.disabledAt) throw gone();
		const user = existing
			? await existing.update({ name, passwordHash }, { transaction: tx })
			: await User.create({ email: row.email, name, passwordHash }, { transaction: tx });
		const actor = asPerson(user);
		await noteArrival(tx, user, existing !== null);
		await grant(tx, actor, user, row);
		return { email: user.email };
	});
}

/** Somebody with an account joins a further group; the link alone is not enough, it must be the invited person. */
export function joinWithAccount(actor: Actor, secret: string): Promise<{ groupId: string | null }> {
	if (actor.scopes) throw notAllowed();
	return write(async (tx) => {
		const row = await use(tx, secret);
		const user = await User.findByPk(actor.userId, { transaction: tx });
		if (!user || user.email !== row.email)
			throw notAllowed(`This invitation is for ${row.email}. Sign in with that address to join.`);
		await grant(tx, actor, user, row);
		return { groupId: row.groupId };
	});
}
