import type { Tx } from '../database';
import { MailOutbox } from '../database/models';

export interface Mail {
	to: string;
	subject: string;
	/** Plain text: says what waits and where (a link), and holds no content of any record. */
	text: string;
}

/** Puts a mail into the outbox, in the transaction of the change that it tells of; the sender delivers it. */
export async function queueMail(tx: Tx, mail: Mail): Promise<void> {
	await MailOutbox.create({ ...mail, nextAttemptAt: new Date() }, { transaction: tx });
}
