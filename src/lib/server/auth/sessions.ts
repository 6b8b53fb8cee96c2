import { Op } from 'sequelize';
import { appendAudit } from '../audit/append';
import { write, type Tx } from '../database';
import { EndedSession, User } from '../database/models';
import type { Actor } from '../policy';

/** Ends every session of a person: each carries the epoch in which it began. */
export async function endSessions(tx: Tx, userId: string): Promise<void> {
	await User.increment('sessionEpoch', { where: { id: userId }, transaction: tx });
}

/** Ends the session of this device, so that neither a copy of its cookie nor an answer still on its way opens it again. */
export function endThisSession(actor: Actor): Promise<void> {
	return write(async (tx) => {
		if (actor.signedInAt)
			await EndedSession.create({ userId: actor.userId, signedInAt: actor.signedInAt }, { transaction: tx });
		await appendAudit(tx, actor, {
			type: 'person.signed-out',
			objectType: 'person',
			objectId: actor.userId,
			payload: { everywhere: false }
		});
	});
}

/** Takes away the notes on sessions that would have ended by themselves meanwhile. */
export function forgetEndedSessions(before: Date): Promise<number> {
	return write((tx) => EndedSession.destroy({ where: { createdAt: { [Op.lt]: before } }, transaction: tx }));
}

/** Ends the person's sessions on every device. */
export function signOutEverywhere(actor: Actor): Promise<void> {
	return write(async (tx) => {
		await endSessions(tx, actor.userId);
		await appendAudit(tx, actor, {
			type: 'person.signed-out',
			objectType: 'person',
			objectId: actor.userId,
			payload: { everywhere: true }
		});
	});
}
