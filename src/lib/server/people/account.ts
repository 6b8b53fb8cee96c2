import { z } from 'zod';
import { nameForm, passwordForm } from '$lib/schemas/people';
import { appendAudit, type AuditActor } from '../audit/append';
import { beginAttempt, clearAttempts, emailRule } from '../auth/attempts';
import { hashPassword, verifyPassword } from '../auth/password';
import { endSessions } from '../auth/sessions';
import { emailKey, waitMessage } from '../auth/sign-in';
import { write, type Tx } from '../database';
import { User } from '../database/models';
import { AppError, notAllowed, notFound } from '../errors';
import type { Actor } from '../policy';

function onlyInPerson(actor: Actor): void {
	if (actor.scopes) throw notAllowed('A token cannot change an account. Sign in as yourself in the browser.');
}

/** A new printed name; signatures keep the name under which they were given. */
export function renameSelf(actor: Actor, input: z.input<typeof nameForm>): Promise<void> {
	onlyInPerson(actor);
	const { name } = nameForm.parse(input);
	return write(async (tx) => {
		const user = await User.findByPk(actor.userId, { transaction: tx });
		if (!user) throw notFound('person');
		if (user.name === name) return;
		const from = user.name;
		await user.update({ name }, { transaction: tx });
		await appendAudit(tx, actor, {
			type: 'person.renamed',
			objectType: 'person',
			objectId: user.id,
			payload: { from, to: name }
		});
	});
}

/** A password must not be what anybody would try first. */
export function refuseObvious(password: string, person: { email: string; name: string }): void {
	const plain = password.toLowerCase().replace(/\s/g, '');
	const known = [person.email.toLowerCase(), person.email.split('@')[0], person.name.replace(/\s/g, '')]
		.map((v) => v.toLowerCase())
		.filter((v) => v.length >= 4);
	const oneLetter = new Set(plain).size < 4;
	if (!oneLetter && !known.some((v) => plain.split(v).join('').length < 6)) return;
	const message = 'This password is easy to guess: it is little more than your name, address or one letter.';
	throw new AppError('invalid', message, { fields: [{ field: 'password', message }] });
}

/** Sets a new password and ends every session; whoever was signed in elsewhere has to sign in again. */
export async function setPassword(
	tx: Tx,
	actor: AuditActor,
	user: User,
	passwordHash: string,
	by: 'self' | 'reset' | 'invitation'
): Promise<void> {
	await user.update({ passwordHash }, { transaction: tx });
	await endSessions(tx, user.id);
	await clearAttempts(tx, emailKey(user.email));
	await appendAudit(tx, actor, {
		type: 'person.password-changed',
		objectType: 'person',
		objectId: user.id,
		payload: { by }
	});
}

/** Change by the person, who proves to be it by the present password; wrong ones count as failed sign-ins. */
export async function changePassword(actor: Actor, input: z.input<typeof passwordForm>): Promise<void> {
	onlyInPerson(actor);
	const { current, password } = passwordForm.parse(input);
	const user = await User.findByPk(actor.userId);
	if (!user) throw notFound('person');
	refuseObvious(password, user);
	const attempt = await beginAttempt(emailKey(user.email), emailRule());
	if (attempt.refused) throw waitMessage(attempt.lockedUntil!, new Date());
	if (!(await verifyPassword(current, user.passwordHash))) {
		await write((tx) =>
			appendAudit(tx, actor, {
				type: 'person.password-check-failed',
				objectType: 'person',
				objectId: user.id,
				payload: { failures: attempt.failures, lockedUntil: attempt.lockedUntil?.toISOString() ?? null }
			})
		);
		const message = 'This is not the password that you use now.';
		throw new AppError('invalid', message, { fields: [{ field: 'current', message }] });
	}
	const passwordHash = await hashPassword(password);
	await write((tx) => setPassword(tx, actor, user, passwordHash, 'self'));
}
