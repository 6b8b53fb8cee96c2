import { describe, expect, it } from 'vitest';
import { write } from '../../src/lib/server/database';
import { IdempotencyKey, SignInAttempt } from '../../src/lib/server/database/models';
import { serviceHealth } from '../../src/lib/server/health';
import { announceStop, startService, stopService } from '../../src/lib/server/hooks/startup';
import { tidyUp } from '../../src/lib/server/housekeeping';
import { BACKGROUND_SERVICES } from '../../src/lib/server/startup';
import { load as adminPage } from '../../src/routes/(app)/admin/+page.server';
import { makeActor, makeGroup, makePerson, openTestDatabase } from './support';
import { eventOf } from './support/call';

openTestDatabase();

const DAY_MS = 24 * 3600_000;

describe('tidying up', () => {
	it('takes away old counters and request keys, and only those', async () => {
		const user = await makePerson();
		const old = new Date(Date.now() - 60 * DAY_MS);
		const key = { userId: user.id, requestHash: 'x', status: 200 };
		await write(async (tx) => {
			await SignInAttempt.create({ key: 'email:old', failures: 3, lastFailedAt: old }, { transaction: tx });
			await SignInAttempt.create(
				{ key: 'email:new', failures: 3, lastFailedAt: new Date() },
				{ transaction: tx }
			);
			await IdempotencyKey.create({ ...key, key: 'old', createdAt: old }, { transaction: tx });
			await IdempotencyKey.create({ ...key, key: 'new' }, { transaction: tx });
		});
		expect(await tidyUp()).toEqual({ attempts: 1, keys: 1 });
		expect((await SignInAttempt.findAll()).map((r) => r.key)).toEqual(['email:new']);
		expect((await IdempotencyKey.findAll()).map((r) => r.key)).toEqual(['new']);
	});
});

describe('the service', () => {
	it('answers somebody who is no site admin on the pages of site admins, and leaves no rejection behind', async () => {
		const unawaited: unknown[] = [];
		const note = (error: unknown) => void unawaited.push(error);
		const others = process.listeners('unhandledRejection');
		process.removeAllListeners('unhandledRejection').on('unhandledRejection', note);
		try {
			const actor = await makeActor(await makeGroup(), 'chemist');
			const event = eventOf({ actor, path: '/admin' }) as never;
			await expect(adminPage(event)).rejects.toMatchObject({ status: 404 });
			await new Promise((resolve) => setTimeout(resolve, 50));
			expect(unawaited).toEqual([]);
		} finally {
			process.removeAllListeners('unhandledRejection');
			for (const listener of others) process.on('unhandledRejection', listener);
		}
	});

	it('starts what runs beside the requests, and stops it before the database closes', async () => {
		const order: string[] = [];
		const spy = {
			name: 'spy',
			start: () => void order.push('started'),
			announceStop: () => void order.push('told to stop'),
			async stop() {
				order.push(`stopped with the database ${(await serviceHealth()).status}`);
			}
		};
		BACKGROUND_SERVICES.push(spy);
		try {
			await startService();
			// A rejection that nobody awaited is logged and does not end the service.
			expect(process.listeners('unhandledRejection').map((f) => f.name)).toContain('logUnawaited');
			announceStop();
			await stopService();
			expect(order).toEqual(['started', 'told to stop', 'stopped with the database up']);
		} finally {
			BACKGROUND_SERVICES.splice(BACKGROUND_SERVICES.indexOf(spy), 1);
		}
	});
});
