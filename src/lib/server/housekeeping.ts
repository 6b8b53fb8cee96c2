import { Op } from 'sequelize';
import { forgetOldAttempts } from './auth/attempts';
import { forgetEndedSessions } from './auth/sessions';
import { write } from './database';
import { IdempotencyKey } from './database/models';
import { log } from './log';
import type { BackgroundService } from './startup';

const EVERY_MS = 6 * 3600_000;
const KEEP_KEYS_MS = 7 * 24 * 3600_000;
/** Longer than any session lasts. */
const KEEP_SESSIONS_MS = 8 * 24 * 3600_000;

/** Takes away what only served for a while: counters of failed sign-ins, keys of repeated requests. No record is touched. */
export async function tidyUp(now = new Date()): Promise<{ attempts: number; keys: number }> {
	const attempts = await forgetOldAttempts(now);
	await forgetEndedSessions(new Date(now.getTime() - KEEP_SESSIONS_MS));
	const before = new Date(now.getTime() - KEEP_KEYS_MS);
	const keys = await write((tx) =>
		IdempotencyKey.destroy({ where: { createdAt: { [Op.lt]: before } }, transaction: tx })
	);
	return { attempts, keys };
}

let timer: NodeJS.Timeout | undefined;
let working: Promise<unknown> = Promise.resolve();

function run(): void {
	working = tidyUp().catch((error: unknown) => log().error({ err: error }, 'tidying up failed'));
}

export const housekeeping: BackgroundService = {
	name: 'housekeeping',
	start() {
		run();
		timer = setInterval(run, EVERY_MS);
		timer.unref();
	},
	async stop() {
		clearInterval(timer);
		await working;
	}
};
