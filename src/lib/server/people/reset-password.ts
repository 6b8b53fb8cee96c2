import { z } from 'zod';
import { askResetForm, resetForm } from '$lib/schemas/people';
import { appendAudit } from '../audit/append';
import { asPerson, UNKNOWN_PERSON } from '../auth/actor';
import { addressRule, beginAttempt } from '../auth/attempts';
import { hashPassword } from '../auth/password';
import { newSecret, secretHash } from '../auth/secrets';
import { waitMessage } from '../auth/sign-in';
import { write } from '../database';
import { PasswordReset, User } from '../database/models';
import { AppError } from '../errors';
import { queueMail } from '../mail/queue';
import { settings } from '../settings';
import { refuseObvious, setPassword } from './account';

const VALID_MS = 60 * 60_000;
const BETWEEN_MAILS_MS = 60_000;

const gone = (): AppError =>
	new AppError('not-found', 'This link was used already or has expired. Ask for a new one.');

/**
 * Asks for a link to set a new password. The answer is the same whether or not there is such a person, and so is
 * the work: one write to disk either way.
 */
export async function askPasswordReset(
	input: z.input<typeof askResetForm> & { address: string }
): Promise<void> {
	const { email } = askResetForm.parse(input);
	const attempt = await beginAttempt(`reset:${input.address}`, addressRule());
	if (attempt.refused) throw waitMessage(attempt.lockedUntil!, new Date());
	const secret = newSecret();
	await write(async (tx) => {
		const user = await User.findOne({ where: { email, disabledAt: null }, transaction: tx });
		await appendAudit(tx, user ? asPerson(user) : UNKNOWN_PERSON, {
			type: 'person.password-reset-asked',
			objectType: 'person',
			objectId: user?.id ?? null,
			payload: {}
		});
		if (!user) return;
		const last = await PasswordReset.findOne({
			where: { userId: user.id },
			order: [['id', 'DESC']],
			transaction: tx
		});
		if (last && Date.now() - last.createdAt.getTime() < BETWEEN_MAILS_MS) return;
		await PasswordReset.create(
			{ userId: user.id, tokenHash: secretHash(secret), expiresAt: new Date(Date.now() + VALID_MS) },
			{ transaction: tx }
		);
		await queueMail(tx, {
			to: user.email,
			subject: 'Set a new password',
			text:
				`A new password was asked for with your e-mail address at ${settings().SITE_NAME}.\n` +
				`Set it within an hour, with this link, which works once:\n\n` +
				`${settings().ORIGIN}/reset/${secret}\n\n` +
				`If it was not you, leave this message: your password stays as it is.\n`
		});
	});
}

const isOpen = (row: PasswordReset | null): row is PasswordReset =>
	row !== null && !row.usedAt && row.expiresAt > new Date();

/** Whose password a link sets; refuses one that was used, has expired or never was. */
export async function readPasswordReset(secret: string): Promise<{ email: string }> {
	const row = await PasswordReset.findOne({ where: { tokenHash: secretHash(secret) } });
	if (!isOpen(row)) throw gone();
	const user = await User.findByPk(row.userId);
	if (!user || user.disabledAt) throw gone();
	return { email: user.email };
}

export async function resetPassword(
	secret: string,
	input: z.input<typeof resetForm>
): Promise<{ email: string }> {
	const { password } = resetForm.parse(input);
	const person = await readPasswordReset(secret);
	refuseObvious(password, { ...person, name: '' });
	const passwordHash = await hashPassword(password);
	return write(async (tx) => {
		const row = await PasswordReset.findOne({
			where: { tokenHash: secretHash(secret) },
			transaction: tx
		});
		const user = isOpen(row) && (await User.findByPk(row.userId, { transaction: tx }));
		if (!user || user.disabledAt) throw gone();
		// Every other link of the person ends too.
		await PasswordReset.update(
			{ usedAt: new Date() },
			{ where: { userId: user.id, usedAt: null }, transaction: tx }
		);
		await setPassword(tx, asPerson(user), user, passwordHash, 'reset');
		return { email: user.email };
	});
}
