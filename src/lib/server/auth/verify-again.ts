import { appendAudit } from '../audit/append';
import { write, type Tx } from '../database';
import { Membership, User } from '../database/models';
import { AppError, notAllowed } from '../errors';
import { queueMail } from '../mail/queue';
import type { Actor } from '../policy';
import { settings } from '../settings';
import { beginAttempt, clearAttempts, signingRule, type Attempt } from './attempts';
import { verifyPassword } from './password';

export interface AskedFor {
	/** Group whose lead is told when signing is locked; left out, the site admins are told. */
	groupId?: string;
	studyId?: string;
}

export const signingKey = (userId: string): string => `signing:${userId}`;

async function leadsOf(tx: Tx, groupId: string | undefined, except: string): Promise<User[]> {
	if (groupId) {
		const leads = await Membership.findAll({ where: { groupId, role: 'group_lead' }, transaction: tx });
		const ids = leads.map((m) => m.userId).filter((id) => id !== except);
		const users = await User.findAll({ where: { id: ids, disabledAt: null }, transaction: tx });
		if (users.length) return users;
	}
	const admins = await User.findAll({ where: { siteAdmin: true, disabledAt: null }, transaction: tx });
	return admins;
}

async function tell(tx: Tx, actor: Actor, groupId: string | undefined): Promise<void> {
	for (const user of await leadsOf(tx, groupId, actor.userId))
		await queueMail(tx, {
			to: user.email,
			subject: 'Signing was locked after wrong passwords',
			text:
				`${actor.name} was asked for the password at signing and three tries were wrong.\n` +
				`Signing is locked for this person for a while. If it was not them, end their sessions.\n\n` +
				`The entries are on the audit trail: ${settings().ORIGIN}/records\n`
		});
}

async function noteFailure(actor: Actor, attempt: Attempt, asked: AskedFor): Promise<void> {
	await write(async (tx) => {
		await appendAudit(tx, actor, {
			type: 'person.password-check-failed',
			groupId: asked.groupId ?? null,
			studyId: asked.studyId ?? null,
			objectType: 'person',
			objectId: actor.userId,
			payload: {
				failures: attempt.failures,
				lockedUntil: attempt.lockedUntil?.toISOString() ?? null
			}
		});
		if (attempt.lockedUntil) await tell(tx, actor, asked.groupId);
	});
}

function lockedMessage(until: Date): AppError {
	const seconds = Math.max(1, Math.ceil((until.getTime() - Date.now()) / 1000));
	return new AppError(
		'locked',
		`Signing is locked for about ${Math.ceil(seconds / 60)} min after three wrong passwords. The group lead has been told. What you wrote is kept.`,
		{ data: { retryAfterS: seconds } }
	);
}

/**
 * Asks for the password once more, as at signing (21 CFR 11.200). Throws when it is wrong, when signing is locked
 * after three wrong ones, and always for a token. Opens its own transactions: call it before `write()`.
 */
export async function verifyPasswordAgain(
	actor: Actor,
	password: string,
	asked: AskedFor = {}
): Promise<void> {
	if (actor.scopes || actor.signedInAt === null)
		throw notAllowed('A token can never sign. Sign in as yourself in the browser.');
	const key = signingKey(actor.userId);
	const attempt = await beginAttempt(key, signingRule());
	if (attempt.refused) throw lockedMessage(attempt.lockedUntil!);
	const user = await User.findByPk(actor.userId);
	const matches = await verifyPassword(password, user?.passwordHash);
	if (matches && user && !user.disabledAt) return write((tx) => clearAttempts(tx, key));
	await noteFailure(actor, attempt, asked);
	if (attempt.lockedUntil) throw lockedMessage(attempt.lockedUntil);
	const left = signingRule().limit - attempt.failures;
	const message = `The password is not right. ${left === 1 ? 'One try is' : `${left} tries are`} left before signing is locked.`;
	throw new AppError('invalid', message, { fields: [{ field: 'password', message }] });
}
