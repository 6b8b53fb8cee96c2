import { Op } from 'sequelize';
import { z } from 'zod';
import { tokenForm } from '$lib/schemas/people';
import { appendAudit, type AuditActor } from '../audit/append';
import { newSecret, secretHash } from '../auth/secrets';
import { TOKEN_PREFIX } from '../auth/tokens';
import { write, type Tx } from '../database';
import { ApiToken } from '../database/models';
import { AppError, notAllowed, notFound } from '../errors';
import type { Actor, Scope } from '../policy';

const DAY_MS = 24 * 3600 * 1000;
const MOST_TOKENS = 50;

export interface TokenView {
	id: string;
	name: string;
	scopes: Scope[];
	createdAt: Date;
	expiresAt: Date;
	lastUsedAt: Date | null;
	expired: boolean;
}

/** Stores a token's hash and gives the token itself, which nobody can be shown again. */
export async function issueToken(
	tx: Tx,
	actor: AuditActor,
	userId: string,
	input: { name: string; scopes: Scope[]; days: number }
): Promise<{ id: string; token: string; expiresAt: Date }> {
	const token = TOKEN_PREFIX + newSecret();
	const expiresAt = new Date(Date.now() + input.days * DAY_MS);
	const row = await ApiToken.create(
		{ userId, name: input.name, scopes: input.scopes, tokenHash: secretHash(token), expiresAt },
		{ transaction: tx }
	);
	await appendAudit(tx, actor, {
		type: 'token.created',
		objectType: 'token',
		objectId: row.id,
		payload: { name: input.name, scopes: input.scopes, expiresAt: expiresAt.toISOString() }
	});
	return { id: row.id, token, expiresAt };
}

function onlyInPerson(actor: Actor): void {
	if (actor.scopes)
		throw notAllowed('A token cannot make or see tokens. Sign in as yourself in the browser.');
}

/** Makes a token for the person's own scripts; it may do at most what the person's roles allow. */
export function createToken(
	actor: Actor,
	input: z.input<typeof tokenForm>
): Promise<{ id: string; token: string; expiresAt: Date }> {
	onlyInPerson(actor);
	const parsed = tokenForm.parse(input);
	return write(async (tx) => {
		const live = { userId: actor.userId, revokedAt: null, expiresAt: { [Op.gt]: new Date() } };
		if ((await ApiToken.count({ where: live, transaction: tx })) >= MOST_TOKENS)
			throw new AppError('conflict', `You have ${MOST_TOKENS} tokens. Revoke one that is no longer used.`);
		return issueToken(tx, actor, actor.userId, parsed);
	});
}

export async function listTokens(actor: Actor): Promise<TokenView[]> {
	onlyInPerson(actor);
	const rows = await ApiToken.findAll({
		where: { userId: actor.userId, revokedAt: null },
		order: [['id', 'DESC']],
		limit: MOST_TOKENS * 2
	});
	const now = new Date();
	return rows.map((row) => ({
		id: row.id,
		name: row.name,
		scopes: row.scopes,
		createdAt: row.createdAt,
		expiresAt: row.expiresAt,
		lastUsedAt: row.lastUsedAt,
		expired: row.expiresAt <= now
	}));
}

export function revokeToken(actor: Actor, tokenId: string): Promise<void> {
	onlyInPerson(actor);
	return write(async (tx) => {
		const where = { id: tokenId, userId: actor.userId, revokedAt: null };
		const row = await ApiToken.findOne({ where, transaction: tx });
		if (!row) throw notFound('token');
		await row.update({ revokedAt: new Date() }, { transaction: tx });
		await appendAudit(tx, actor, {
			type: 'token.revoked',
			objectType: 'token',
			objectId: row.id,
			payload: { name: row.name }
		});
	});
}
