import { createTransport, type Transporter } from 'nodemailer';
import { settings } from '../settings';

let transporter: Transporter | undefined;
let forUrl: string | undefined;

/** How mail leaves: by SMTP, into the mailbox of a demonstration or of development, or (unset in production) not yet. */
export type MailWay = 'smtp' | 'mailbox' | 'waiting';

export function mailWay(): MailWay {
	const { SMTP_URL, DEMO, NODE_ENV } = settings();
	if (SMTP_URL) return 'smtp';
	return DEMO || NODE_ENV !== 'production' ? 'mailbox' : 'waiting';
}

/** The connection to the mail server, kept open between mails, with short patience so that one mail never blocks the rest. */
export function smtp(): Transporter {
	const url = settings().SMTP_URL;
	if (!url) throw new Error('SMTP_URL is not set.');
	if (transporter && forUrl === url) return transporter;
	transporter?.close();
	forUrl = url;
	transporter = createTransport({
		url,
		pool: true,
		maxConnections: 2,
		connectionTimeout: 10_000,
		greetingTimeout: 10_000,
		socketTimeout: 20_000,
		disableFileAccess: true,
		disableUrlAccess: true
	});
	return transporter;
}

export function closeSmtp(): void {
	transporter?.close();
	transporter = undefined;
	forUrl = undefined;
}
