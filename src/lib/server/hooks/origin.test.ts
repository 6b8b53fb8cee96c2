import { describe, expect, it } from 'vitest';
import { bearerOf, comesFromUs, takesBody } from './origin';

const US = 'https://ratewright.example';
const post = (headers: Record<string, string>, body?: string) =>
	new Request(`${US}/api/v1/x`, { method: 'POST', headers, body });

describe('a request that changes something', () => {
	it('is ours when the browser names our origin', () => {
		expect(comesFromUs(post({ origin: US }), US)).toBe(true);
	});
	it('is not ours from another site, another port or an opaque place', () => {
		for (const origin of ['https://evil.example', `${US}:8443`, 'http://ratewright.example', 'null'])
			expect(comesFromUs(post({ origin }), US), origin).toBe(false);
	});
	it('without an origin is taken as JSON only, never as a form', () => {
		expect(comesFromUs(post({ 'content-type': 'application/json' }, '{}'), US)).toBe(true);
		for (const type of [
			'application/x-www-form-urlencoded',
			'multipart/form-data; boundary=x',
			'text/plain',
			'text/plain; charset=application/json'
		])
			expect(comesFromUs(post({ 'content-type': type }, 'a=b'), US), type).toBe(false);
	});
	it('is not ours when the browser says that another site made it', () => {
		const headers = { 'content-type': 'application/json', 'sec-fetch-site': 'cross-site' };
		expect(comesFromUs(post(headers, '{}'), US)).toBe(false);
	});
});

describe('the API', () => {
	it('takes JSON and multipart, whatever stands behind the type', () => {
		expect(takesBody(post({ 'content-type': 'application/json; charset=utf-8' }, '{}'))).toBe(true);
		expect(takesBody(post({ 'content-type': 'multipart/form-data; boundary=x' }, 'x'))).toBe(true);
	});
	it('takes no form, no text and no body without a type', () => {
		expect(takesBody(post({ 'content-type': 'application/x-www-form-urlencoded' }, 'a=b'))).toBe(false);
		expect(takesBody(post({ 'content-type': 'text/plain' }, '{}'))).toBe(false);
		const bare = post({ 'content-length': '2' });
		expect(takesBody(bare)).toBe(false);
	});
	it('takes a request without a body', () => {
		expect(takesBody(post({}))).toBe(true);
	});
	it('reads a bearer token and nothing that only looks like one', () => {
		expect(bearerOf(post({ authorization: 'Bearer rw_abc' }))).toBe('rw_abc');
		expect(bearerOf(post({ authorization: 'bearer rw_abc' }))).toBe('rw_abc');
		for (const authorization of ['Basic cnc=', 'Bearer', 'Bearer a b', 'rw_abc'])
			expect(bearerOf(post({ authorization })), authorization).toBeNull();
	});
});
