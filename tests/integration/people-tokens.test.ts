import { describe, expect, it } from 'vitest';
import { actorOfToken } from '../../src/lib/server/auth/tokens';
import { write } from '../../src/lib/server/database';
import { ApiToken } from '../../src/lib/server/database/models';
import { issueTokenFor, makeSiteAdmin } from '../../src/lib/server/people/commands';
import { readInvitation } from '../../src/lib/server/people/accept-invitation';
import { setDisabled } from '../../src/lib/server/people/persons';
import { createToken, listTokens, revokeToken } from '../../src/lib/server/people/tokens';
import { can, requireSiteAdmin } from '../../src/lib/server/policy';
import { signIn } from '../../src/lib/server/auth/sign-in';
import { actorOf, makeGroup, makePerson, openTestDatabase } from './support';

openTestDatabase();

const wanted = { name: 'assay robot', scopes: ['read' as const, 'fit' as const], days: 30 };

describe('an API token', () => {
	it('speaks for its person, under its name and within its scopes', async () => {
		const group = await makeGroup();
		const user = await makePerson({ group, role: 'chemist' });
		const { token } = await createToken(await actorOf(user), wanted);
		const actor = await actorOfToken(token);
		expect(actor).toMatchObject({
			userId: user.id,
			source: 'token: assay robot',
			scopes: ['read', 'fit'],
			signedInAt: null
		});
		expect(can(actor, group.id, 'study.read')).toBe(true);
		expect(can(actor, group.id, 'fit.run')).toBe(true);
		expect(can(actor, group.id, 'study.write')).toBe(false);
	});

	it('is stored as a hash only', async () => {
		const { id, token } = await createToken(await actorOf(await makePerson()), wanted);
		const row = await ApiToken.findByPk(id);
		expect(JSON.stringify(row)).not.toContain(token);
	});

	it('may never sign, acknowledge, invite or administer, whatever its person may', async () => {
		const group = await makeGroup();
		const user = await makePerson({ siteAdmin: true, group, role: 'group_lead' });
		const all = { ...wanted, scopes: ['read' as const, 'write' as const, 'fit' as const, 'export' as const] };
		const actor = await actorOfToken((await createToken(await actorOf(user), all)).token);
		for (const action of [
			'recipe.validate',
			'recipe.verify',
			'recipe.acknowledge',
			'members.invite'
		] as const)
			expect(can(actor, group.id, action), action).toBe(false);
		expect(() => requireSiteAdmin(actor)).toThrow();
		expect(() => createToken(actor, wanted)).toThrow(/token/);
	});

	it('is refused in the same words when unknown, revoked, expired or its person disabled', async () => {
		const admin = await actorOf(await makePerson({ siteAdmin: true }));
		const user = await makePerson();
		const actor = await actorOf(user);
		const [revoked, expired, live] = [
			await createToken(actor, wanted),
			await createToken(actor, wanted),
			await createToken(actor, wanted)
		];
		await revokeToken(actor, revoked.id);
		await write((tx) =>
			ApiToken.update({ expiresAt: new Date(0) }, { where: { id: expired.id }, transaction: tx })
		);
		expect((await actorOfToken(live.token)).userId).toBe(user.id);
		await setDisabled(admin, user.id, true);
		const messages = await Promise.all(
			['rw_nonsense', 'nonsense', revoked.token, expired.token, live.token].map((t) =>
				actorOfToken(t).then(
					() => 'let in',
					(e: Error) => e.message
				)
			)
		);
		expect(new Set(messages)).toEqual(
			new Set(['This token is unknown, revoked or expired. Make a new one.'])
		);
	});

	it('shows when it was last used', async () => {
		const actor = await actorOf(await makePerson());
		const { id, token } = await createToken(actor, wanted);
		expect((await listTokens(actor))[0]).toMatchObject({ id, lastUsedAt: null });
		await actorOfToken(token);
		expect((await listTokens(actor))[0].lastUsedAt).toBeInstanceOf(Date);
	});

	it("cannot be revoked by somebody else, and another's is not listed", async () => {
		const owner = await actorOf(await makePerson());
		const other = await actorOf(await makePerson());
		const { id } = await createToken(owner, wanted);
		expect(await listTokens(other)).toEqual([]);
		await expect(revokeToken(other, id)).rejects.toMatchObject({ code: 'not-found' });
		await expect(revokeToken(owner, 'malformed')).rejects.toMatchObject({ code: 'not-found' });
	});
});

describe('commands on the server', () => {
	it('issue a token for a person by e-mail address', async () => {
		const user = await makePerson({ email: 'robot.owner@kiln-lane.example' });
		const input = { email: 'Robot.Owner@kiln-lane.example', name: 'nightly', scopes: ['read'], days: 2 };
		expect((await actorOfToken((await issueTokenFor(input)).token)).userId).toBe(user.id);
	});
	it('name the person or scope that they do not know', async () => {
		const input = { email: 'nobody@kiln-lane.example', name: 'nightly', scopes: ['read'], days: 2 };
		await expect(issueTokenFor(input)).rejects.toThrow(/no active person with the address nobody@/);
		await expect(issueTokenFor({ ...input, scopes: ['sign'] })).rejects.toThrow();
	});
	it('make the first site admin, who sets a password by a link that works once', async () => {
		const made = await makeSiteAdmin({ email: 'first@kiln-lane.example', name: 'First Admin' });
		const secret = made.link!.split('/').pop()!;
		expect(await readInvitation(secret)).toMatchObject({ siteAdmin: true, known: false });
	});
	it('or take the password at once', async () => {
		const input = { email: 'second@kiln-lane.example', name: 'Second Admin', password: 'from a pipe, long' };
		expect((await makeSiteAdmin(input)).link).toBeNull();
		const user = await signIn({ email: input.email, password: input.password, address: '192.0.2.9' });
		expect(user.siteAdmin).toBe(true);
		await expect(makeSiteAdmin({ ...input, password: 'short' })).rejects.toThrow(/at least 12/);
	});
});
