import { write } from '../database';
import { ApiToken, User } from '../database/models';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { toActor } from './actor';
import { secretHash } from './secrets';

export const TOKEN_PREFIX = 'rw_';
const LAST_USED_STEP_MS = 60_000;

/** Who a bearer token speaks for: its person, limited to its scopes. Unknown, ended and expired all read the same. */
export async function actorOfToken(bearer: string, now = new Date()): Promise<Actor> {
	const refused = new AppError('not-signed-in', 'This token is unknown, revoked or expired. Make a new one.');
	if (!bearer.startsWith(TOKEN_PREFIX)) throw refused;
	const token = await ApiToken.findOne({ where: { tokenHash: secretHash(bearer) } });
	if (!token || token.revokedAt || token.expiresAt <= now) throw refused;
	const user = await User.findByPk(token.userId);
	if (!user || user.disabledAt) throw refused;
	await noteUse(token, now);
	return { ...(await toActor(user, `token: ${token.name}`, null)), scopes: token.scopes };
}

/** To the minute is enough to see whether a token is in use, and keeps reading calls free of writes. */
async function noteUse(token: ApiToken, now: Date): Promise<void> {
	if (token.lastUsedAt && now.getTime() - token.lastUsedAt.getTime() < LAST_USED_STEP_MS) return;
	await write((tx) => ApiToken.update({ lastUsedAt: now }, { where: { id: token.id }, transaction: tx }));
}
