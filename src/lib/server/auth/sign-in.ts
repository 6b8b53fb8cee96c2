import { z } from 'zod';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { User } from '../database/models';
import { AppError } from '../errors';
import { asPerson, UNKNOWN_PERSON } from './actor';
import {
	addressRule,
	beginAttempt,
	clearAttempts,
	emailRule,
	takeBackAttempt,
	type Attempt
} from './attempts';
import { verifyPassword } from './password';

export interface SignInInput {
	email: string;
	password: string;
	/** Network address of the browser. */
	address: string;
}

// A null character ends a text for the database, wherever it stands.
export const normalEmail = (email: string): string =>
	email.replaceAll('\0', '').trim().normalize('NFKC').toLowerCase();
export const emailKey = (email: string): string => `email:${email}`;
const addressKey = (address: string): string => `address:${address}`;

const refused = (): AppError =>
	new AppError('invalid', 'E-mail address and password do not belong together. Check both and try again.');

/** One message for every locked key, whether or not there is such a person. */
export function waitMessage(lockedUntil: Date, now: Date): AppError {
	const seconds = Math.max(1, Math.ceil((lockedUntil.getTime() - now.getTime()) / 1000));
	const minutes = Math.ceil(seconds / 60);
	return new AppError(
		'locked',
		`Too many attempts were wrong. Try again in about ${minutes === 1 ? 'a minute' : `${minutes} minutes`}, or ask for a new password.`,
		{ data: { retryAfterS: seconds } }
	);
}

/** What was typed goes to the trail only where it is an address: people type passwords into the wrong field. */
const forTrail = (email: string): string =>
	z.email().max(254).safeParse(email).success ? email : '(not an e-mail address)';

async function noteFailure(user: User | null, email: string, attempt: Attempt): Promise<void> {
	const actor = user ? asPerson(user) : UNKNOWN_PERSON;
	await write((tx) =>
		appendAudit(tx, actor, {
			type: 'person.sign-in-failed',
			objectType: 'person',
			objectId: user?.id ?? null,
			payload: { email: forTrail(email), lockedUntil: attempt.lockedUntil?.toISOString() ?? null }
		})
	);
}

/**
 * Checks e-mail address and password; gives the person, or refuses in the same words and in about the same time
 * whoever was named. Every failure is counted per e-mail address and per network address, and is on the trail.
 */
export async function signIn({ email: typed, password, address }: SignInInput): Promise<User> {
	const now = new Date();
	const email = normalEmail(typed).slice(0, 254);
	const byAddress = await beginAttempt(addressKey(address), addressRule(), now);
	if (byAddress.refused) throw waitMessage(byAddress.lockedUntil!, now);
	const byEmail = await beginAttempt(emailKey(email), emailRule(), now);
	if (byEmail.refused) throw waitMessage(byEmail.lockedUntil!, now);

	const user = await User.findOne({ where: { email } });
	const matches = await verifyPassword(password, user?.passwordHash);
	if (!user || !matches || user.disabledAt) {
		await noteFailure(user, email, byEmail);
		throw refused();
	}
	await write(async (tx) => {
		await clearAttempts(tx, emailKey(email));
		await takeBackAttempt(tx, addressKey(address));
		await appendAudit(tx, asPerson(user), {
			type: 'person.signed-in',
			objectType: 'person',
			objectId: user.id,
			payload: {}
		});
	});
	return user;
}
