import { beforeAll, describe, expect, it } from 'vitest';
import { makeActor, makeGroup, openTestDatabase } from './support';
import { once } from '../../src/lib/server/api/idempotency';
import { answer } from '../../src/lib/server/api/request';
import { write } from '../../src/lib/server/database';
import { IdempotencyKey, Study, type Group } from '../../src/lib/server/database/models';
import { AppError } from '../../src/lib/server/errors';
import type { Actor } from '../../src/lib/server/policy';
import { createStudy } from '../../src/lib/server/studies/create-study';

openTestDatabase();

let group: Group;
let chemist: Actor;
beforeAll(async () => {
	group = await makeGroup();
	chemist = await makeActor(group);
});

const request = (key: string) =>
	new Request('http://localhost/api/v1/groups/x/studies', {
		method: 'POST',
		headers: { 'idempotency-key': key }
	});
const keyRow = (key: string) => IdempotencyKey.findOne({ where: { userId: chemist.userId, key } });
const studies = (name: string) => Study.count({ where: { groupId: group.id, name } });

async function make(name: string): Promise<Response> {
	const { id } = await createStudy(chemist, {
		groupId: group.id,
		name,
		decision: 'when to quench',
		criteria: []
	});
	return answer({ id }, { status: 201, location: `/api/v1/studies/${id}` });
}

describe('a write under an Idempotency-Key', () => {
	it('has its key on record by the time its own write is there, before any answer', async () => {
		const key = 'key-beside-the-write';
		let seen: number | undefined;
		const response = await once(chemist, request(key), {}, async () => {
			const made = await make('Beside');
			// A service that stops here has both the study and the key.
			seen = (await keyRow(key))?.status;
			return made;
		});
		expect(seen).toBe(0);
		expect(response.status).toBe(201);
		expect((await keyRow(key))?.status).toBe(201);
		const again = await once(chemist, request(key), {}, () => make('Beside'));
		expect(again.headers.get('idempotent-replay')).toBe('true');
		expect(await again.json()).toEqual(await response.json());
		expect(await studies('Beside')).toBe(1);
	});

	it('is not done twice where the service stopped before the answer was kept', async () => {
		const key = 'key-without-an-answer';
		const first = await once(chemist, request(key), {}, () => make('Stopped'));
		expect(first.status).toBe(201);
		await write((tx) =>
			IdempotencyKey.update({ status: 0, body: null }, { where: { key }, transaction: tx })
		);
		const repeat = once(chemist, request(key), {}, () => make('Stopped'));
		await expect(repeat).rejects.toMatchObject({ code: 'conflict' });
		await expect(repeat).rejects.toThrow(/was carried out/);
		expect(await studies('Stopped')).toBe(1);
	});

	it('leaves no key where the write was rolled back or refused, so that it may be sent again', async () => {
		const key = 'key-of-a-refusal';
		const refused = once(chemist, request(key), {}, () =>
			write(() => Promise.reject(new AppError('invalid', 'no')))
		);
		await expect(refused).rejects.toMatchObject({ code: 'invalid' });
		expect(await keyRow(key)).toBeNull();
		const late = once(chemist, request(key), {}, async () => {
			await make('Late');
			throw new AppError('unavailable', 'later');
		});
		await expect(late).rejects.toMatchObject({ code: 'unavailable' });
		expect(await keyRow(key)).toBeNull();
		expect((await once(chemist, request(key), {}, () => make('Late again'))).status).toBe(201);
	});

	it('without a write of its own is remembered all the same, and other writes carry no key', async () => {
		const key = 'key-without-a-write';
		await once(chemist, request(key), {}, () => Promise.resolve(answer({ nothing: true })));
		expect((await keyRow(key))?.status).toBe(200);
		await make('Plain');
		expect(await IdempotencyKey.count({ where: { status: 0, userId: chemist.userId, key } })).toBe(0);
	});
});
