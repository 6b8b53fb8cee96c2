import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import { QueryInterface } from 'sequelize';
import { openDatabase } from '../../src/lib/server/database';
import { User } from '../../src/lib/server/database/models';
import { testSettings } from './support';

let folder = '';
beforeAll(() => {
	testSettings();
	folder = mkdtempSync(path.join(tmpdir(), 'ratewright-test-'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe('a database', () => {
	it('is as before when its preparation was broken off, and the next start prepares it', async () => {
		const file = path.join(folder, 'broken-off.sqlite');
		const failing = vi.spyOn(QueryInterface.prototype, 'addIndex');
		failing.mockImplementationOnce(() => Promise.reject(new Error('the power failed')));
		await expect(openDatabase(file)).rejects.toThrow(/the power failed/);
		failing.mockRestore();
		const open = await openDatabase(file);
		expect(await User.count()).toBe(0);
		await open.close();
	});

	it('is prepared once when two processes open it at the same moment', async () => {
		const file = path.join(folder, 'two.sqlite');
		const both = await Promise.all([openDatabase(file), openDatabase(file)]);
		expect(await User.count()).toBe(0);
		for (const open of both) await open.close();
	});

	it('says so when the file is something else', async () => {
		const file = path.join(folder, 'letter.sqlite');
		writeFileSync(file, 'Dear colleague, this is a letter and no database at all. '.repeat(40));
		await expect(openDatabase(file)).rejects.toThrow(/not a database/);
	});
});
