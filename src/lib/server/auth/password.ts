import { hash, verify } from '@node-rs/argon2';
import { PASSWORD_MAX } from '$lib/schemas/people';

/** argon2id (the library's default algorithm) with the parameters of the OWASP password storage guide (19 MiB, two passes, one lane). */
const PARAMETERS = { memoryCost: 19_456, timeCost: 2, parallelism: 1 };

export const hashPassword = (password: string): Promise<string> =>
	hash(password.normalize('NFKC'), PARAMETERS);

let standIn: Promise<string> | undefined;

/**
 * Compares in about the same time whether or not there is a person or a password: without one, a stand-in is
 * compared and the answer is no.
 */
export async function verifyPassword(password: string, stored: string | null | undefined): Promise<boolean> {
	standIn ??= hashPassword('nobody has this password');
	const fallback = await standIn;
	const matches = await verify(stored ?? fallback, password.slice(0, PASSWORD_MAX).normalize('NFKC'));
	return matches && Boolean(stored);
}
