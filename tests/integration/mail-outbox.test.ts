import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import type { AddressInfo } from 'node:net';
import { SMTPServer } from 'smtp-server';
import { write } from '../../src/lib/server/database';
import { MailOutbox } from '../../src/lib/server/database/models';
import { queueMail } from '../../src/lib/server/mail/queue';
import { mailSender, MOST_TRIES, sendDueMail, waitAfterTry } from '../../src/lib/server/mail/sender';
import { readMailbox, readMailState, retryMail } from '../../src/lib/server/mail/state';
import { closeSmtp } from '../../src/lib/server/mail/transport';
import { resetSettings } from '../../src/lib/server/settings';
import { actorOf, makePerson, openTestDatabase, refusal, testSettings } from './support';

openTestDatabase();

let server: SMTPServer;
const received: { from: string; to: string[]; text: string }[] = [];
/** What the mail server does with the next mail. */
let refuseWith: number | null = null;

beforeAll(async () => {
	server = new SMTPServer({
		authOptional: true,
		disabledCommands: ['STARTTLS'],
		onRcptTo(_to, _session, done) {
			if (refuseWith === null) return done();
			done(Object.assign(new Error('refused for the test'), { responseCode: refuseWith }));
		},
		onData(stream, session, done) {
			const parts: Buffer[] = [];
			stream.on('data', (part: Buffer) => parts.push(part));
			stream.on('end', () => {
				const { mailFrom, rcptTo } = session.envelope;
				received.push({
					from: mailFrom ? mailFrom.address : '',
					to: rcptTo.map((r) => r.address),
					text: Buffer.concat(parts).toString('utf8')
				});
				done();
			});
		}
	});
	await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
});
beforeEach(async () => {
	received.length = 0;
	refuseWith = null;
	await write((tx) => MailOutbox.destroy({ where: {}, transaction: tx }));
	const { port } = server.server.address() as AddressInfo;
	testSettings({
		SMTP_URL: `smtp://127.0.0.1:${port}`,
		MAIL_FROM: 'Ratewright <no-reply@kiln-lane.example>'
	});
});
afterAll(async () => {
	closeSmtp();
	await new Promise<void>((resolve) => server.close(() => resolve()));
	delete process.env.SMTP_URL;
	resetSettings();
});

const mail = { to: 'm.okafor@kiln-lane.example', subject: 'A recipe waits', text: 'Open it: http://x/1\n' };
const queue = () => write((tx) => queueMail(tx, mail));
const row = async () => (await MailOutbox.findOne())!;
const admin = async () => actorOf(await makePerson({ siteAdmin: true }));

describe('the outbox', () => {
	it('delivers a queued mail once, over SMTP, as plain text from the site address', async () => {
		await queue();
		expect(await sendDueMail()).toBe(1);
		expect(await sendDueMail()).toBe(0);
		expect(received).toHaveLength(1);
		expect(received[0]).toMatchObject({ from: 'no-reply@kiln-lane.example', to: [mail.to] });
		expect(received[0].text).toMatch(/^Subject: A recipe waits/m);
		expect(received[0].text).toMatch(/Content-Type: text\/plain/);
		expect(received[0].text).toContain('http://x/1');
	});

	it('does not keep the links of a mail that was sent', async () => {
		await queue();
		await sendDueMail();
		expect(await row()).toMatchObject({ status: 'sent', text: '', error: null });
	});

	it('holds no mail of a change that failed', async () => {
		await expect(
			write(async (tx) => {
				await queueMail(tx, mail);
				throw new Error('the change failed');
			})
		).rejects.toThrow('the change failed');
		expect(await MailOutbox.count()).toBe(0);
	});

	it('tries again later when the server has no time, with a longer wait each time', async () => {
		refuseWith = 451;
		await queue();
		const now = new Date();
		await sendDueMail(now);
		const waiting = await row();
		expect(waiting).toMatchObject({ status: 'queued', attempts: 1 });
		expect(waiting.error).toMatch(/refused for the test/);
		expect(await sendDueMail(new Date(now.getTime() + 59_000))).toBe(0);
		refuseWith = null;
		expect(await sendDueMail(new Date(now.getTime() + 61_000))).toBe(1);
		expect(received).toHaveLength(1);
		expect([1, 2, 3, 8].map((n) => waitAfterTry(n) / 60_000)).toEqual([1, 4, 16, 360]);
	});

	it('tries again when no server answers at all', async () => {
		testSettings({ SMTP_URL: 'smtp://127.0.0.1:1' });
		await queue();
		await sendDueMail();
		expect(await row()).toMatchObject({ status: 'queued', attempts: 1 });
	});

	it('gives up after its last try, and an admin sees why and can try again', async () => {
		refuseWith = 451;
		await queue();
		let now = Date.now();
		for (let i = 0; i < MOST_TRIES; i++, now += 7 * 3600_000) await sendDueMail(new Date(now));
		const { id, status } = await row();
		expect(status).toBe('failed');
		const actor = await admin();
		const state = await readMailState(actor);
		expect(state).toMatchObject({ way: 'smtp', counts: { failed: 1 }, open: [{ id, to: mail.to }] });
		expect(state.open[0].error).toMatch(/refused for the test/);
		expect(JSON.stringify(state)).not.toContain('http://x/1');
		refuseWith = null;
		await retryMail(actor, id);
		await sendDueMail();
		expect(received).toHaveLength(1);
		expect((await refusal(() => retryMail(actor, id))).code).toBe('not-found');
	});

	it('gives up at once on an address that the server does not know', async () => {
		refuseWith = 550;
		await queue();
		await sendDueMail();
		expect(await row()).toMatchObject({ status: 'failed', attempts: 1 });
	});

	it('is sent from by one process only, however many look into it', async () => {
		await queue();
		await Promise.all([sendDueMail(), sendDueMail(), sendDueMail()]);
		expect(received).toHaveLength(1);
	});

	it('is looked into for as long as the service runs, and stops cleanly', async () => {
		await queue();
		await mailSender.start();
		await expect.poll(() => received.length).toBe(1);
		await mailSender.stop();
		await queue();
		expect(await MailOutbox.count({ where: { status: 'queued' } })).toBe(1);
	});
});

describe('without a mail server', () => {
	it('a demonstration keeps mail in a mailbox that its admin reads', async () => {
		delete process.env.SMTP_URL;
		testSettings({ DEMO: '1', NODE_ENV: 'production' });
		await queue();
		await sendDueMail();
		expect((await readMailbox(await admin()))[0]).toMatchObject({ to: mail.to, text: mail.text });
		expect((await refusal(async () => readMailbox(await actorOf(await makePerson())))).code).toBe(
			'not-found'
		);
		delete process.env.DEMO;
		testSettings({ NODE_ENV: 'test' });
	});
	it('in production mail waits, and nobody can read it', async () => {
		delete process.env.SMTP_URL;
		testSettings({ NODE_ENV: 'production' });
		await queue();
		expect(await sendDueMail()).toBe(0);
		const actor = await admin();
		expect((await readMailState(actor)).way).toBe('waiting');
		expect((await refusal(() => readMailbox(actor))).code).toBe('not-found');
		testSettings({ NODE_ENV: 'test' });
	});
});
