import { describe, expect, it } from 'vitest';
import { readActor } from '../../src/lib/server/auth/actor';
import { waitAfter } from '../../src/lib/server/auth/attempts';
import { hashPassword, verifyPassword } from '../../src/lib/server/auth/password';
import { signIn } from '../../src/lib/server/auth/sign-in';
import { endThisSession, signOutEverywhere } from '../../src/lib/server/auth/sessions';
import { verifyPasswordAgain } from '../../src/lib/server/auth/verify-again';
import { write } from '../../src/lib/server/database';
import { AuditEvent, MailOutbox, SignInAttempt, User } from '../../src/lib/server/database/models';
import { changePassword, renameSelf } from '../../src/lib/server/people/account';
import { setDisabled } from '../../src/lib/server/people/persons';
import { actorOf, makeGroup, makePerson, openTestDatabase } from './support';

openTestDatabase();

const RIGHT = 'amber glass and paper';
let address = 0;
/** Each case from a network address of its own, so that only the e-mail lockout is at work. */
const from = () => `192.0.2.${++address}`;
const session = (user: User) => ({
	userId: user.id,
	epoch: user.sessionEpoch,
	signedInAt: new Date().toISOString()
});

const attempt = (email: string, password: string, at = from()) => signIn({ email, password, address: at });
const refusal = async (work: Promise<unknown>) => {
	try {
		await work;
	} catch (error) {
		return error as Error & { code: string; options: { data?: { retryAfterS?: number } } };
	}
	throw new Error('It should have been refused.');
};

describe('passwords', () => {
	it('are stored as argon2id with a salt of their own', async () => {
		const [a, b] = await Promise.all([hashPassword(RIGHT), hashPassword(RIGHT)]);
		expect(a).toMatch(/^\$argon2id\$v=19\$m=19456,t=2,p=1\$/);
		expect(a).not.toBe(b);
	});
	it('match whichever way an accented letter was typed', async () => {
		expect(await verifyPassword('caf\u00e9 au lait', await hashPassword('cafe\u0301 au lait'))).toBe(true);
	});
	it('never match where there is none', async () => {
		expect(await verifyPassword('nobody has this password', null)).toBe(false);
	});
});

describe('signing in', () => {
	it('gives the person for the right password, whatever the case of the address', async () => {
		const user = await makePerson({ email: 'ada@kiln-lane.example', password: RIGHT });
		expect((await attempt(' Ada@Kiln-Lane.example', RIGHT)).id).toBe(user.id);
		const [last] = await AuditEvent.findAll({ order: [['seq', 'DESC']], limit: 1 });
		expect(last).toMatchObject({ type: 'person.signed-in', userId: user.id, source: 'screen' });
	});

	it('ends with signing out on that device, also for a copy of the cookie, and on no other device', async () => {
		const user = await makePerson({ password: RIGHT });
		const here = session(user);
		const there = { ...here, signedInAt: new Date(Date.now() - 60_000).toISOString() };
		await endThisSession((await readActor(here))!);
		expect(await readActor(here)).toBeNull();
		expect((await readActor(there))?.userId).toBe(user.id);
	});

	it('takes a null character in the address for nothing at all', async () => {
		const user = await makePerson({ email: 'nul@kiln-lane.example', password: RIGHT });
		expect((await attempt('nul@kiln-lane.example\0', RIGHT)).id).toBe(user.id);
		expect((await refusal(attempt('\0', RIGHT))).code).toBe('invalid');
	});

	it('answers in the same words for an unknown person, a wrong password and a disabled person', async () => {
		await makePerson({ email: 'ben@kiln-lane.example', password: RIGHT });
		await makePerson({ email: 'off@kiln-lane.example', password: RIGHT, disabledAt: new Date() });
		const answers = [
			await refusal(attempt('nobody@kiln-lane.example', RIGHT)),
			await refusal(attempt('ben@kiln-lane.example', 'wrong')),
			await refusal(attempt('off@kiln-lane.example', RIGHT))
		];
		expect(new Set(answers.map((a) => `${a.code} ${a.message}`)).size).toBe(1);
	});

	it('keeps what was typed instead of an address off the trail', async () => {
		await refusal(attempt('my secret password', 'x'));
		const [last] = await AuditEvent.findAll({ order: [['seq', 'DESC']], limit: 1 });
		expect(JSON.parse(last.payload)).toMatchObject({ email: '(not an e-mail address)' });
	});

	it('locks an address after five failures, even for the right password, and says for how long', async () => {
		const email = 'cleo@kiln-lane.example';
		await makePerson({ email, password: RIGHT });
		for (let i = 0; i < 5; i++) expect((await refusal(attempt(email, 'wrong'))).code).toBe('invalid');
		const locked = await refusal(attempt(email, RIGHT));
		expect(locked.code).toBe('locked');
		expect(locked.options.data?.retryAfterS).toBeGreaterThan(0);
		expect(locked.options.data?.retryAfterS).toBeLessThanOrEqual(60);
	});

	it('locks an unknown address just the same, so that the lock tells nothing', async () => {
		for (let i = 0; i < 5; i++) await refusal(attempt('ghost@kiln-lane.example', 'wrong'));
		expect((await refusal(attempt('ghost@kiln-lane.example', 'wrong'))).code).toBe('locked');
	});

	it('lets nobody slip past the lock by guessing many at once', async () => {
		const email = 'dora@kiln-lane.example';
		await makePerson({ email, password: RIGHT });
		const answers = await Promise.all(
			Array.from({ length: 20 }, (_, i) => refusal(attempt(email, `guess ${i}`)))
		);
		expect(answers.filter((a) => a.code === 'invalid')).toHaveLength(5);
		expect(answers.filter((a) => a.code === 'locked')).toHaveLength(15);
	});

	it('starts counting afresh after a success', async () => {
		const email = 'eve@kiln-lane.example';
		await makePerson({ email, password: RIGHT });
		for (let i = 0; i < 4; i++) await refusal(attempt(email, 'wrong'));
		await attempt(email, RIGHT);
		expect(await SignInAttempt.findOne({ where: { key: `email:${email}` } })).toBeNull();
	});

	it('locks one network address that tries many people, and a success there does not free it', async () => {
		const at = '198.51.100.7';
		await makePerson({ email: 'finn@kiln-lane.example', password: RIGHT });
		for (let i = 0; i < 49; i++) await refusal(attempt(`someone${i}@kiln-lane.example`, 'x', at));
		await attempt('finn@kiln-lane.example', RIGHT, at);
		await refusal(attempt('another@kiln-lane.example', 'x', at));
		expect((await refusal(attempt('finn@kiln-lane.example', RIGHT, at))).code).toBe('locked');
	});

	it('waits twice as long after each further failure, up to a limit', () => {
		const rule = { limit: 5, firstWaitMs: 60_000, longestWaitMs: 900_000 };
		expect([4, 5, 6, 7, 8, 9, 50].map((n) => waitAfter(n, rule) / 60_000)).toEqual([0, 1, 2, 4, 8, 15, 15]);
	});
});

describe('a session', () => {
	it('ends on every device by signing out everywhere', async () => {
		const user = await makePerson();
		const before = session(user);
		expect(await readActor(before)).toMatchObject({ userId: user.id, source: 'screen' });
		await signOutEverywhere(await actorOf(user));
		expect(await readActor(before)).toBeNull();
	});

	it('ends when the password changes, and the old password no longer works', async () => {
		const user = await makePerson({ email: 'gil@kiln-lane.example', password: RIGHT });
		const before = session(user);
		const next = 'verdigris on copper';
		await changePassword(await actorOf(user), { current: RIGHT, password: next, again: next });
		expect(await readActor(before)).toBeNull();
		await refusal(attempt('gil@kiln-lane.example', RIGHT));
		expect((await attempt('gil@kiln-lane.example', next)).id).toBe(user.id);
	});

	it('ends when the person is disabled, and stays ended when enabled again', async () => {
		const admin = await actorOf(await makePerson({ siteAdmin: true }));
		const user = await makePerson();
		const before = session(user);
		await setDisabled(admin, user.id, true);
		expect(await readActor(before)).toBeNull();
		await setDisabled(admin, user.id, false);
		expect(await readActor(before)).toBeNull();
	});

	it('of a person who is not there is none', async () => {
		expect(
			await readActor({ userId: 'no-such-id', epoch: 0, signedInAt: new Date().toISOString() })
		).toBeNull();
	});
});

describe('changing the own account', () => {
	it('needs the present password, and wrong ones count', async () => {
		const user = await makePerson({ password: RIGHT });
		const change = { current: 'not it', password: 'another good phrase', again: 'another good phrase' };
		const refused = await refusal(changePassword(await actorOf(user), change));
		expect(refused).toMatchObject({ code: 'invalid', options: { fields: [{ field: 'current' }] } });
		const row = await SignInAttempt.findOne({ where: { key: `email:${user.email}` } });
		expect(row?.failures).toBe(1);
	});

	it('refuses a password that is the name or the address', async () => {
		const user = await makePerson({ name: 'Marguerite', password: RIGHT });
		const obvious = 'Marguerite 12';
		const refused = await refusal(
			changePassword(await actorOf(user), { current: RIGHT, password: obvious, again: obvious })
		);
		expect(refused.message).toMatch(/easy to guess/);
	});

	it('cannot be done by a token', async () => {
		const actor = await actorOf(await makePerson(), { scopes: ['read', 'write'] });
		expect(() => renameSelf(actor, { name: 'Somebody Else' })).toThrow(/token/);
	});

	it('keeps the former name on the trail', async () => {
		const user = await makePerson({ name: 'Ida Former' });
		await renameSelf(await actorOf(user), { name: 'Ida Latter' });
		const [last] = await AuditEvent.findAll({ order: [['seq', 'DESC']], limit: 1 });
		expect(last).toMatchObject({ type: 'person.renamed', printedName: 'Ida Former' });
		expect(JSON.parse(last.payload)).toEqual({ from: 'Ida Former', to: 'Ida Latter' });
	});
});

describe('asking for the password again', () => {
	it('lets the right one through and forgets earlier mistakes', async () => {
		const actor = await actorOf(await makePerson({ password: RIGHT }));
		await refusal(verifyPasswordAgain(actor, 'wrong'));
		await verifyPasswordAgain(actor, RIGHT);
		const again = await refusal(verifyPasswordAgain(actor, 'wrong'));
		expect(again.message).toMatch(/2 tries are left/);
	});

	it('locks after three wrong ones, puts each on the trail of the group and tells the other lead', async () => {
		const group = await makeGroup();
		const lead = await makePerson({ group, role: 'group_lead' });
		const user = await makePerson({ group, role: 'group_lead', password: RIGHT });
		const actor = await actorOf(user);
		const asked = { groupId: group.id };
		expect((await refusal(verifyPasswordAgain(actor, 'a', asked))).message).toMatch(/2 tries are left/);
		expect((await refusal(verifyPasswordAgain(actor, 'b', asked))).message).toMatch(/One try is left/);
		expect((await refusal(verifyPasswordAgain(actor, 'c', asked))).code).toBe('locked');
		expect((await refusal(verifyPasswordAgain(actor, RIGHT, asked))).code).toBe('locked');
		const where = { type: 'person.password-check-failed', userId: user.id, groupId: group.id };
		expect(await AuditEvent.count({ where })).toBe(3);
		const mails = await MailOutbox.findAll({ where: { to: lead.email } });
		expect(mails).toHaveLength(1);
	});

	it('tells the site admins where the group has no other lead', async () => {
		const group = await makeGroup();
		const admin = await makePerson({ siteAdmin: true });
		const actor = await actorOf(await makePerson({ group, role: 'group_lead', password: RIGHT }));
		for (const wrong of ['a', 'b', 'c'])
			await refusal(verifyPasswordAgain(actor, wrong, { groupId: group.id }));
		expect(await MailOutbox.count({ where: { to: admin.email } })).toBe(1);
	});

	it('refuses a token always, even with the right password', async () => {
		const user = await makePerson({ password: RIGHT });
		const actor = await actorOf(user, { scopes: ['read', 'write', 'fit', 'export'] });
		expect((await refusal(verifyPasswordAgain(actor, RIGHT))).code).toBe('not-allowed');
	});

	it('refuses a person disabled meanwhile', async () => {
		const user = await makePerson({ password: RIGHT });
		const actor = await actorOf(user);
		await write((tx) => user.update({ disabledAt: new Date() }, { transaction: tx }));
		await refusal(verifyPasswordAgain(actor, RIGHT));
	});
});
