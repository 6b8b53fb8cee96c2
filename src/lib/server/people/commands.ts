import { z } from 'zod';
import { nameForm, resetForm, tokenForm } from '$lib/schemas/people';
import { appendAudit, type AuditActor } from '../audit/append';
import { hashPassword } from '../auth/password';
import { newSecret, secretHash } from '../auth/secrets';
import { normalEmail } from '../auth/sign-in';
import { write } from '../database';
import { Invitation, User } from '../database/models';
import { AppError } from '../errors';
import { settings } from '../settings';
import { setPassword } from './account';
import { issueToken } from './tokens';

/** Whoever may start programs on the server; the trail names the command, since the server knows no person then. */
const COMMAND: AuditActor = {
	userId: null,
	name: 'Command on the server',
	source: 'command',
	memberships: [],
	siteAdmin: false
};
const INVITATION_HOURS = 24;

/** A token for a person, made by the one who runs the server. */
export async function issueTokenFor(input: {
	email: string;
	name: string;
	scopes: string[];
	days: number;
}): Promise<{ token: string; expiresAt: Date }> {
	const wanted = tokenForm.parse({ name: input.name, scopes: input.scopes, days: input.days });
	const email = normalEmail(input.email);
	return write(async (tx) => {
		const user = await User.findOne({ where: { email, disabledAt: null }, transaction: tx });
		if (!user) throw new AppError('not-found', `There is no active person with the address ${email}.`);
		return issueToken(tx, COMMAND, user.id, wanted);
	});
}

async function adminBy(email: string, name: string): Promise<User> {
	const parsed = nameForm.parse({ name });
	return write(async (tx) => {
		const existing = await User.findOne({ where: { email }, transaction: tx });
		if (existing?.siteAdmin && !existing.disabledAt) return existing;
		const user = existing
			? await existing.update({ siteAdmin: true, disabledAt: null }, { transaction: tx })
			: await User.create({ email, name: parsed.name, siteAdmin: true }, { transaction: tx });
		await appendAudit(
			tx,
			COMMAND,
			existing
				? {
						type: 'person.admin-changed',
						objectType: 'person',
						objectId: user.id,
						payload: { siteAdmin: true }
					}
				: {
						type: 'person.created',
						objectType: 'person',
						objectId: user.id,
						payload: { email, name: user.name, siteAdmin: true }
					}
		);
		return user;
	});
}

/** Makes a person site admin; without a password they get a link, printed once, with which they set their own. */
export async function makeSiteAdmin(input: {
	email: string;
	name: string;
	password?: string;
}): Promise<{ link: string | null; known: boolean }> {
	const email = z
		.email('Give an e-mail address such as a.person@example.com.')
		.parse(normalEmail(input.email));
	const password = input.password;
	if (password !== undefined) resetForm.parse({ password, again: password });
	const user = await adminBy(email, input.name);
	if (password !== undefined) {
		const passwordHash = await hashPassword(password);
		await write((tx) => setPassword(tx, COMMAND, user, passwordHash, 'invitation'));
		return { link: null, known: true };
	}
	if (user.passwordHash) return { link: null, known: true };
	const secret = newSecret();
	const expiresAt = new Date(Date.now() + INVITATION_HOURS * 3600_000);
	await write((tx) =>
		Invitation.create(
			{ email, siteAdmin: true, tokenHash: secretHash(secret), expiresAt },
			{ transaction: tx }
		)
	);
	return { link: `${settings().ORIGIN}/invitation/${secret}`, known: false };
}
