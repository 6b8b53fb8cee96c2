import { Op } from 'sequelize';
import { write, type Tx } from '../database';
import { SignInAttempt } from '../database/models';
import { settings } from '../settings';

const MINUTE_MS = 60_000;
/** Failures further apart than this do not add up. */
const FORGET_AFTER_MS = 12 * 60 * MINUTE_MS;

/** How many failures one key may have before it waits, and how the wait grows. */
export interface AttemptRule {
	limit: number;
	firstWaitMs: number;
	longestWaitMs: number;
}

export interface Attempt {
	failures: number;
	lockedUntil: Date | null;
}

/** Per e-mail address: strict, doubling from one minute to fifteen, so that nobody is locked out for long by others. */
export const emailRule = (): AttemptRule => ({
	limit: settings().SIGN_IN_ATTEMPTS,
	firstWaitMs: MINUTE_MS,
	longestWaitMs: 15 * MINUTE_MS
});

/** Per network address: looser, since a whole site may stand behind one. */
export const addressRule = (): AttemptRule => ({
	limit: settings().SIGN_IN_ATTEMPTS * 10,
	firstWaitMs: MINUTE_MS,
	longestWaitMs: 60 * MINUTE_MS
});

/** At signing: three wrong passwords lock it, whatever the sign-in setting. */
export const signingRule = (): AttemptRule => ({
	limit: 3,
	firstWaitMs: 15 * MINUTE_MS,
	longestWaitMs: 60 * MINUTE_MS
});

/** The wait after this many failures: none below the limit, then doubling. */
export function waitAfter(failures: number, rule: AttemptRule): number {
	if (failures < rule.limit) return 0;
	return Math.min(rule.longestWaitMs, rule.firstWaitMs * 2 ** Math.min(failures - rule.limit, 20));
}

const stillLocked = (row: SignInAttempt | null, now: Date): Date | null =>
	row?.lockedUntil && row.lockedUntil > now ? row.lockedUntil : null;

/**
 * Counts an attempt as failed *before* the password is compared, so that many at once cannot slip through between
 * comparing and counting. While the key is locked nothing is counted and `refused` is true.
 */
export function beginAttempt(
	key: string,
	rule: AttemptRule,
	now = new Date()
): Promise<Attempt & { refused: boolean }> {
	return write(async (tx) => {
		const row = await SignInAttempt.findOne({ where: { key }, transaction: tx });
		const locked = stillLocked(row, now);
		if (locked) return { failures: row!.failures, lockedUntil: locked, refused: true };
		const recent = row?.lastFailedAt && now.getTime() - row.lastFailedAt.getTime() < FORGET_AFTER_MS;
		const failures = (recent ? row.failures : 0) + 1;
		const waitMs = waitAfter(failures, rule);
		const lockedUntil = waitMs ? new Date(now.getTime() + waitMs) : null;
		const values = { failures, lockedUntil, lastFailedAt: now };
		if (row) await row.update(values, { transaction: tx });
		else await SignInAttempt.create({ key, ...values }, { transaction: tx });
		return { failures, lockedUntil, refused: false };
	});
}

/** The password was right: this key starts afresh. */
export async function clearAttempts(tx: Tx, key: string): Promise<void> {
	await SignInAttempt.destroy({ where: { key }, transaction: tx });
}

/** The attempt was none after all; what others at the same address got wrong stays counted. */
export async function takeBackAttempt(tx: Tx, key: string): Promise<void> {
	const row = await SignInAttempt.findOne({ where: { key }, transaction: tx });
	if (row)
		await row.update({ failures: Math.max(0, row.failures - 1), lockedUntil: null }, { transaction: tx });
}

/** Housekeeping: addresses that nobody tried for a month need no row. */
export function forgetOldAttempts(now = new Date()): Promise<number> {
	const limit = new Date(now.getTime() - 30 * 24 * 60 * MINUTE_MS);
	return write((tx) =>
		SignInAttempt.destroy({ where: { lastFailedAt: { [Op.lt]: limit } }, transaction: tx })
	);
}
