import { appendAudit } from '../audit/append';
import { write, type Tx } from '../database';
import { User } from '../database/models';
import type { Actor } from '../policy';

/** Ends every session of a person: each carries the epoch in which it began. */
export async function endSessions(tx: Tx, userId: string): Promise<void> {
	await User.increment('sessionEpoch', { where: { id: userId }, transaction: tx });
}

/** Notes on the trail that the person signed out on this device; the cookie is the page's to take away. */
export function noteSignOut(actor: Actor): Promise<void> {
	return write((tx) =>
		appendAudit(tx, actor, {
			type: 'person.signed-out',
			objectType: 'person',
			objectId: actor.userId,
			payload: { everywhere: false }
		})
	);
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
