import { Op } from 'sequelize';
import { write } from '../database';
import { MailOutbox } from '../database/models';
import { log } from '../log';
import { settings } from '../settings';
import type { BackgroundService } from '../startup';
import { closeSmtp, mailWay, smtp } from './transport';

const POLL_MS = 3000;
const BATCH = 20;
/** Eight tries over about a day; then the admin sees it with its error. */
export const MOST_TRIES = 8;
const FIRST_WAIT_MS = 60_000;
const LONGEST_WAIT_MS = 6 * 3600_000;
/** While one process sends a mail, no other takes it up. */
const LEASE_MS = 5 * 60_000;

export const waitAfterTry = (tries: number): number =>
	Math.min(LONGEST_WAIT_MS, FIRST_WAIT_MS * 4 ** (tries - 1));

/** Takes a mail for sending, unless another process was quicker. */
async function claim(row: MailOutbox, now: Date): Promise<boolean> {
	const [claimed] = await write((tx) =>
		MailOutbox.update(
			{ attempts: row.attempts + 1, nextAttemptAt: new Date(now.getTime() + LEASE_MS) },
			{ where: { id: row.id, status: 'queued', attempts: row.attempts }, transaction: tx }
		)
	);
	return claimed === 1;
}

/** The server says that this address will never take it: trying again would only annoy. */
function isFinal(error: unknown): boolean {
	const code = (error as { responseCode?: number }).responseCode;
	return code !== undefined && code >= 550 && code <= 559;
}

async function deliver(row: MailOutbox): Promise<void> {
	await smtp().sendMail({
		from: settings().MAIL_FROM,
		to: row.to,
		subject: row.subject,
		text: row.text,
		// The same for every try, so that a mail sent twice can be known as one.
		messageId: `<${row.id}@${new URL(settings().ORIGIN).hostname}>`,
		headers: { 'Auto-Submitted': 'auto-generated' }
	});
}

async function noteSent(row: MailOutbox): Promise<void> {
	// The links in it are keys: once sent, they are not kept.
	const fields = { status: 'sent', sentAt: new Date(), error: null, text: '' };
	await write((tx) => MailOutbox.update(fields, { where: { id: row.id }, transaction: tx }));
}

async function noteFailure(row: MailOutbox, error: unknown, now: Date): Promise<void> {
	const tries = row.attempts + 1;
	const givenUp = isFinal(error) || tries >= MOST_TRIES;
	const message = error instanceof Error ? error.message : String(error);
	log().warn({ mail: row.id, tries, givenUp, err: error }, 'mail not sent');
	await write((tx) =>
		MailOutbox.update(
			{
				status: givenUp ? 'failed' : 'queued',
				error: message.slice(0, 500),
				nextAttemptAt: new Date(now.getTime() + waitAfterTry(tries))
			},
			{ where: { id: row.id }, transaction: tx }
		)
	);
}

async function handOver(row: MailOutbox, now: Date): Promise<void> {
	if (!(await claim(row, now))) return;
	try {
		await deliver(row);
	} catch (error) {
		return noteFailure(row, error, now);
	}
	await noteSent(row);
}

/** Sends what is due, oldest first; returns how many mails were taken up. */
export async function sendDueMail(now = new Date()): Promise<number> {
	const way = mailWay();
	if (way === 'waiting') return 0;
	const due = await MailOutbox.findAll({
		where: { status: 'queued', nextAttemptAt: { [Op.lte]: now } },
		order: [['id', 'ASC']],
		limit: BATCH
	});
	for (const row of due) {
		if (way === 'smtp') await handOver(row, now);
		else
			await write((tx) =>
				MailOutbox.update(
					{ status: 'mailbox', sentAt: new Date() },
					{ where: { id: row.id, status: 'queued' }, transaction: tx }
				)
			);
	}
	return due.length;
}

let timer: NodeJS.Timeout | undefined;
let working: Promise<unknown> = Promise.resolve();
let stopped = true;

async function round(): Promise<void> {
	try {
		while (!stopped && (await sendDueMail()) === BATCH);
	} catch (error) {
		log().error({ err: error }, 'the outbox could not be read');
	}
	if (!stopped) timer = setTimeout(next, POLL_MS);
}
function next(): void {
	working = round();
}

/** Looks into the outbox every few seconds for as long as the service runs. */
export const mailSender: BackgroundService = {
	name: 'mail',
	start() {
		stopped = false;
		if (mailWay() === 'waiting') log().warn('SMTP_URL is not set: mail waits in the outbox until it is.');
		next();
	},
	async stop() {
		stopped = true;
		clearTimeout(timer);
		await working;
		closeSmtp();
	}
};
