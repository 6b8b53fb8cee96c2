import { fn, col } from 'sequelize';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { MailOutbox } from '../database/models';
import { notFound } from '../errors';
import { requireSiteAdmin, type Actor } from '../policy';
import { mailWay, type MailWay } from './transport';

export interface MailView {
	id: string;
	to: string;
	subject: string;
	status: string;
	attempts: number;
	createdAt: Date;
	nextAttemptAt: Date;
	sentAt: Date | null;
	error: string | null;
}

export interface MailState {
	way: MailWay;
	counts: Record<string, number>;
	/** Mail that waits or was given up, newest first. */
	open: MailView[];
}

const SHOWN = 50;

const view = (row: MailOutbox): MailView => ({
	id: row.id,
	to: row.to,
	subject: row.subject,
	status: row.status,
	attempts: row.attempts,
	createdAt: row.createdAt,
	nextAttemptAt: row.nextAttemptAt,
	sentAt: row.sentAt,
	error: row.error
});

/** Whether mail goes out, and what does not. The text of a mail holds a key and is not shown. */
export async function readMailState(actor: Actor): Promise<MailState> {
	requireSiteAdmin(actor);
	const [rows, counts] = await Promise.all([
		MailOutbox.findAll({
			where: { status: ['queued', 'failed'] },
			order: [['id', 'DESC']],
			limit: SHOWN
		}),
		MailOutbox.findAll({
			attributes: ['status', [fn('COUNT', col('id')), 'n']],
			group: ['status'],
			raw: true
		}) as unknown as Promise<{ status: string; n: number }[]>
	]);
	return {
		way: mailWay(),
		counts: Object.fromEntries(counts.map((c) => [c.status, Number(c.n)])),
		open: rows.map(view)
	};
}

/** Puts a mail that was given up back into the queue. */
export function retryMail(actor: Actor, mailId: string): Promise<void> {
	requireSiteAdmin(actor);
	return write(async (tx) => {
		const row = await MailOutbox.findOne({ where: { id: mailId, status: 'failed' }, transaction: tx });
		if (!row) throw notFound('mail');
		await row.update(
			{ status: 'queued', attempts: 0, nextAttemptAt: new Date(), error: null },
			{ transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'mail.tried-again',
			objectType: 'mail',
			objectId: row.id,
			payload: { subject: row.subject }
		});
	});
}

export interface MailboxMail {
	id: string;
	to: string;
	subject: string;
	text: string;
	at: Date;
}

/** The mailbox of a demonstration or of development. Where mail is real there is none: its text holds keys. */
export async function readMailbox(actor: Actor): Promise<MailboxMail[]> {
	requireSiteAdmin(actor);
	if (mailWay() !== 'mailbox') throw notFound('mailbox');
	const rows = await MailOutbox.findAll({
		where: { status: ['mailbox', 'queued'] },
		order: [['id', 'DESC']],
		limit: SHOWN
	});
	return rows.map(({ id, to, subject, text, createdAt }) => ({ id, to, subject, text, at: createdAt }));
}
