import { describe, expect, it } from 'vitest';
import { guard, isPublic, safeNext } from './guard';

describe('what is open without signing in', () => {
	it('is the entry, the health check and the description of the API', () => {
		for (const path of [
			'/',
			'/healthz',
			'/sign-in',
			'/sign-out',
			'/reset',
			'/reset/abc',
			'/invitation/abc',
			'/api/v1/openapi.json',
			'/api/v1/docs'
		])
			expect(isPublic(path), path).toBe(true);
	});
	it('is nothing else, however similar it looks', () => {
		for (const path of [
			'/studies',
			'/sign-in/x',
			'/sign-inn',
			'/invitation',
			'/invitation/a/b',
			'/reset/a/b',
			'/healthz/x',
			'/api/v1/openapi.json/x',
			'/api/v1/studies/healthz',
			'//healthz',
			'/admin'
		])
			expect(isPublic(path), path).toBe(false);
	});
});

describe('the way back after signing in', () => {
	it('keeps path, query and place of our own pages', () => {
		expect(safeNext('/studies/1/fit?run=2#curves')).toBe('/studies/1/fit?run=2#curves');
	});
	it('never leads to another address', () => {
		for (const next of [
			'https://evil.example',
			'//evil.example',
			'/\\evil.example',
			'\\\\evil.example',
			'javascript:alert(1)',
			'/\t/evil.example',
			'/..//evil.example',
			'/.//evil.example',
			'/x/..//evil.example',
			'/%2e%2e//evil.example',
			'',
			null,
			undefined
		])
			expect(safeNext(next, '/home'), String(next)).toSatisfy((p: string) => /^\/(?![/\\])/.test(p));
	});
	it('is the usual first page when there is none', () => {
		expect(safeNext(null)).toBe('/studies');
		expect(safeNext('https://evil.example', '/')).toBe('/');
	});
});

describe('an address', () => {
	it('with a null character in its query is refused before anything is looked up', async () => {
		const url = new URL('http://localhost:4300/studies?q=a%00b');
		const event = { url, route: { id: '/studies' }, locals: { actor: null } } as never;
		const response = await guard({ event, resolve: () => new Response('reached') });
		expect(response.status).toBe(422);
	});
});
