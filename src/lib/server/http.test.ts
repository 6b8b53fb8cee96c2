import { error, redirect } from '@sveltejs/kit';
import { beforeAll, describe, expect, it } from 'vitest';
import { z } from 'zod';
import { AppError, notFound, versionChanged } from './errors';
import { api, page, problemOf, toAppError } from './http';
import { resetSettings } from './settings';

beforeAll(() => {
	Object.assign(process.env, { AUTH_SECRET: 'for-tests-only-for-tests-only-for-tests', LOG_LEVEL: 'silent' });
	resetSettings();
});

const event = { request: new Request('http://x/api/v1/y'), url: new URL('http://x/api/v1/y') };
const call = async (work: () => unknown) => {
	const response = await api(work)(event);
	return { response, body: (await response.json()) as Record<string, unknown> };
};

describe('an API handler', () => {
	it('answers JSON that no cache keeps', async () => {
		const { response, body } = await call(() => ({ a: 1 }));
		expect(body).toEqual({ a: 1 });
		expect(response.headers.get('cache-control')).toBe('no-store');
	});
	it('lets a Response pass and answers nothing with 204', async () => {
		expect((await api(() => new Response('x', { status: 202 }))(event)).status).toBe(202);
		expect((await api(() => undefined)(event)).status).toBe(204);
	});
	it('answers a refusal with problem details', async () => {
		const { response, body } = await call(() => {
			throw notFound('study');
		});
		expect(response.status).toBe(404);
		expect(response.headers.get('content-type')).toBe('application/problem+json');
		expect(body).toEqual({
			type: '/api/v1/docs#not-found',
			title: 'Not found',
			status: 404,
			code: 'not-found',
			detail: 'There is no such study, or it is not shared with you.'
		});
	});
	it('gives the newer version with a conflict', async () => {
		const { body } = await call(() => {
			throw versionChanged({ version: 4 });
		});
		expect(body).toMatchObject({ status: 409, code: 'version-changed', data: { version: 4 } });
	});
	it('names each field that a schema refuses', async () => {
		const schema = z.object({ a: z.object({ b: z.number('Enter a number.') }), c: z.string('Enter text.') });
		const { response, body } = await call(() => schema.parse({ a: { b: 'x' } }));
		expect(response.status).toBe(422);
		expect(body).toMatchObject({
			code: 'invalid',
			detail: 'a.b: Enter a number.',
			fields: [
				{ field: 'a.b', message: 'Enter a number.' },
				{ field: 'c', message: 'Enter text.' }
			]
		});
	});
	it('says when to come back', async () => {
		const { response } = await call(() => {
			throw new AppError('too-many-requests', 'Slower, please.', { data: { retryAfterS: 2.2 } });
		});
		expect(response.headers.get('retry-after')).toBe('3');
	});
	it('tells nothing of an unforeseen fault but a reference', async () => {
		const { response, body } = await call(() => {
			throw new TypeError('secret path /srv/x');
		});
		expect(response.status).toBe(500);
		expect(JSON.stringify(body)).not.toContain('secret');
		expect(body.errorId).toMatch(/^[0-9a-f]{10}$/);
		expect(body.detail).toContain(body.errorId);
	});
	it('keeps the status of what the framework throws', async () => {
		const { body } = await call(() => error(413, 'too much'));
		expect(body).toMatchObject({ code: 'too-large', detail: 'too much' });
	});
});

describe('a page', () => {
	it('turns a refusal into the error page with its code', async () => {
		await expect(
			page(() => {
				throw notFound('study');
			})()
		).rejects.toMatchObject({ status: 404, body: { code: 'not-found' } });
	});
	it('gives the error page the reference of an unforeseen fault', async () => {
		await expect(
			page(() => {
				throw new TypeError('x');
			})()
		).rejects.toMatchObject({ status: 500, body: { id: expect.stringMatching(/^[0-9a-f]{10}$/) as string } });
	});
	it('lets redirects pass', async () => {
		await expect(page(() => redirect(303, '/x'))()).rejects.toMatchObject({ status: 303, location: '/x' });
	});
});

describe('problem details', () => {
	it('carry no inner detail that is for the log', () => {
		const refused = new AppError('invalid', 'Not so.', { detail: 'inner' });
		expect(JSON.stringify(problemOf(toAppError(refused)))).not.toContain('inner');
	});
});
