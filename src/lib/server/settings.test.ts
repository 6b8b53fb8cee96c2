import { describe, expect, it } from 'vitest';
import { parseSettings } from './settings';

const AUTH_SECRET = 'for-tests-only-for-tests-only-for-tests';
const problemWith = (env: Record<string, string>): string => {
	try {
		parseSettings(env);
	} catch (error) {
		return (error as Error).message;
	}
	throw new Error('These settings were taken.');
};

describe('settings', () => {
	it('say how a missing key is made', () => {
		expect(problemWith({})).toMatch(/AUTH_SECRET is missing.*openssl rand/);
	});
	it('take a name that is set to nothing as not set', () => {
		expect(parseSettings({ AUTH_SECRET, ORIGIN: '', FIT_WORKERS: '' })).toMatchObject({
			ORIGIN: 'http://localhost:4300',
			FIT_WORKERS: 1
		});
	});
	it('keep the address without its closing slash, since links are made by adding a path', () => {
		expect(parseSettings({ AUTH_SECRET, ORIGIN: 'https://rates.example/' }).ORIGIN).toBe(
			'https://rates.example'
		);
	});
	it('refuse an address that is none of the web, and list everything that is wrong at once', () => {
		for (const ORIGIN of ['rates.example', 'localhost:4300', 'ftp://rates.example'])
			expect(problemWith({ AUTH_SECRET, ORIGIN }), ORIGIN).toMatch(/ORIGIN must be the full address/);
		const both = problemWith({ AUTH_SECRET: 'short', FIT_WORKERS: '0' });
		expect(both).toMatch(/AUTH_SECRET must have at least 32/);
		expect(both).toMatch(/FIT_WORKERS/);
	});
});
