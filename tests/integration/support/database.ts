import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { afterAll, beforeAll } from 'vitest';
import { openDatabase, useDatabase, type Database } from '../../../src/lib/server/database';
import { resetSettings } from '../../../src/lib/server/settings';

/** Settings under which use cases run in tests; a test may change one and call resetSettings(). */
export function testSettings(extra: Record<string, string> = {}): void {
	Object.assign(process.env, {
		AUTH_SECRET: 'for-tests-only-for-tests-only-for-tests',
		LOG_LEVEL: 'silent',
		ORIGIN: 'http://localhost:4300',
		...extra
	});
	resetSettings();
}

/**
 * Call once at the top of a test file: the file gets a real SQLite file of its own, migrated, which every
 * use case then writes to; it is closed and removed when the file's tests are done.
 */
export function openTestDatabase(): { database(): Database } {
	let folder = '';
	let open: Database | undefined;
	beforeAll(async () => {
		testSettings();
		folder = mkdtempSync(path.join(tmpdir(), 'ratewright-test-'));
		open = await openDatabase(path.join(folder, 'test.sqlite'));
		useDatabase(open);
	});
	afterAll(async () => {
		await open?.close();
		rmSync(folder, { recursive: true, force: true });
	});
	return {
		database: () => {
			if (!open) throw new Error('The test database opens in beforeAll: use it inside a test.');
			return open;
		}
	};
}
