import { describe, expect, it } from 'vitest';
import { signIn } from '../../src/lib/server/auth/sign-in';
import { makePerson, openTestDatabase } from './support';

openTestDatabase();

describe('signing in', () => {
	it('gives the person for the right password, whatever the case of the address', async () => {
		const user = await makePerson({ email: 'ada@kiln-lane.example', password: 'a long enough password' });
		const found = await signIn({
			email: ' Ada@Kiln-Lane.example',
			password: 'a long enough password',
			address: '192.0.2.1'
		});
		expect(found.id).toBe(user.id);
	});
});
