import { beforeAll, describe, expect, it } from 'vitest';
import { write } from '../../src/lib/server/database';
import {
	AuditEvent,
	Group,
	Invitation,
	MailOutbox,
	Membership,
	User
} from '../../src/lib/server/database/models';
import {
	acceptInvitation,
	joinWithAccount,
	readInvitation
} from '../../src/lib/server/people/accept-invitation';
import { changeGroup, createGroup, listGroups } from '../../src/lib/server/people/groups';
import { inviteAsAdmin, inviteMember, revokeInvitation } from '../../src/lib/server/people/invite';
import { changeRole, readGroup, removeMember } from '../../src/lib/server/people/members';
import { listPeople, setDisabled, setSiteAdmin } from '../../src/lib/server/people/persons';
import {
	askPasswordReset,
	readPasswordReset,
	resetPassword
} from '../../src/lib/server/people/reset-password';
import { readSiteSettings, saveSiteSettings } from '../../src/lib/server/people/site-settings';
import { signIn } from '../../src/lib/server/auth/sign-in';
import { roleIn, type Actor } from '../../src/lib/server/policy';
import { actorOf, makeActor, makeGroup, makePerson, openTestDatabase, refusal } from './support';

openTestDatabase();

let group: Group;
let other: Group;
let lead: Actor;
let chemist: Actor;
let outsider: Actor;
let admin: Actor;
beforeAll(async () => {
	[group, other] = [await makeGroup({ name: 'Kiln Lane 2' }), await makeGroup({ name: 'Ropewalk' })];
	lead = await makeActor(group, 'group_lead');
	chemist = await makeActor(group, 'chemist');
	outsider = await makeActor(other, 'group_lead');
	admin = await actorOf(await makePerson({ siteAdmin: true }));
});

let counter = 0;
const address = () => `new${++counter}@ropewalk.example`;
const password = { password: 'a phrase of some length', again: 'a phrase of some length' };

/** The key in the newest mail to this address. */
async function keyMailedTo(to: string): Promise<string> {
	const mail = await MailOutbox.findOne({ where: { to }, order: [['id', 'DESC']] });
	return /\/(?:invitation|reset)\/(\S+)/.exec(mail!.text)![1];
}
const lastEvent = () => AuditEvent.findOne({ order: [['seq', 'DESC']] });

describe('an invitation', () => {
	it('makes the invited person a member with the role, once', async () => {
		const email = address();
		await inviteMember(lead, { groupId: group.id, email, role: 'qa_reviewer' });
		const key = await keyMailedTo(email);
		expect(await readInvitation(key)).toEqual({
			email,
			groupName: 'Kiln Lane 2',
			role: 'qa_reviewer',
			siteAdmin: false,
			known: false
		});
		await acceptInvitation(key, { name: 'New Person', ...password });
		const user = await signIn({ email, password: password.password, address: '192.0.2.1' });
		expect(roleIn(await actorOf(user), group.id)).toBe('qa_reviewer');
		expect((await refusal(() => acceptInvitation(key, { name: 'Again', ...password }))).code).toBe(
			'not-found'
		);
	});

	it('cannot be used twice at the same moment', async () => {
		const email = address();
		await inviteMember(lead, { groupId: group.id, email, role: 'chemist' });
		const key = await keyMailedTo(email);
		const tries = await Promise.allSettled(
			[1, 2, 3].map(() => acceptInvitation(key, { name: 'New Person', ...password }))
		);
		expect(tries.filter((t) => t.status === 'fulfilled')).toHaveLength(1);
	});

	it('mails a link and no content of any record', async () => {
		const email = address();
		await inviteMember(lead, { groupId: group.id, email, role: 'chemist' });
		const mail = await MailOutbox.findOne({ where: { to: email } });
		expect(mail!.text).not.toContain(group.name);
		expect(mail!.text.match(/https?:\/\//g)).toHaveLength(1);
	});

	it('stores only the hash of its key', async () => {
		const email = address();
		await inviteMember(lead, { groupId: group.id, email, role: 'chemist' });
		const rows = await Invitation.findAll({ where: { email } });
		expect(JSON.stringify(rows)).not.toContain(await keyMailedTo(email));
	});

	it('ends when it expires, is taken back or is followed by a new one', async () => {
		const [expired, revoked, replaced] = [address(), address(), address()];
		for (const email of [expired, revoked, replaced])
			await inviteMember(lead, { groupId: group.id, email, role: 'chemist' });
		const keys = await Promise.all([expired, revoked, replaced].map(keyMailedTo));
		await write((tx) =>
			Invitation.update({ expiresAt: new Date(0) }, { where: { email: expired }, transaction: tx })
		);
		const row = await Invitation.findOne({ where: { email: revoked } });
		await revokeInvitation(lead, row!.id);
		await inviteMember(lead, { groupId: group.id, email: replaced, role: 'reader' });
		for (const key of keys) expect((await refusal(() => readInvitation(key))).code).toBe('not-found');
		expect((await readInvitation(await keyMailedTo(replaced))).role).toBe('reader');
	});

	it('lets somebody with an account join a further group, but only the one who was invited', async () => {
		const user = await makePerson({ group: other, role: 'chemist', password: 'has one already' });
		await inviteMember(lead, { groupId: group.id, email: user.email, role: 'reader' });
		const key = await keyMailedTo(user.email);
		expect((await readInvitation(key)).known).toBe(true);
		expect((await refusal(() => acceptInvitation(key, { name: 'Impostor', ...password }))).code).toBe(
			'conflict'
		);
		expect((await refusal(() => joinWithAccount(chemist, key))).code).toBe('not-allowed');
		await joinWithAccount(await actorOf(user), key);
		const actor = await actorOf(user);
		expect([roleIn(actor, other.id), roleIn(actor, group.id)]).toEqual(['chemist', 'reader']);
	});

	it('is refused for a member, for oneself and for a disabled person', async () => {
		const off = await makePerson({ disabledAt: new Date() });
		for (const email of [chemist.email, lead.email, off.email]) {
			const refused = await refusal(() => inviteMember(lead, { groupId: group.id, email, role: 'chemist' }));
			expect(refused).toMatchObject({ code: 'conflict', options: { fields: [{ field: 'email' }] } });
		}
	});

	it('is for group leads: 403 inside the group, 404 outside, 404 for a group that is not there', async () => {
		const invite = (actor: Actor, groupId: string) => () =>
			inviteMember(actor, { groupId, email: address(), role: 'chemist' });
		expect((await refusal(invite(chemist, group.id))).code).toBe('not-allowed');
		expect((await refusal(invite(outsider, group.id))).code).toBe('not-found');
		expect((await refusal(invite(lead, 'malformed'))).code).toBe('not-found');
		expect((await refusal(invite(admin, group.id))).code).toBe('not-found');
	});

	it("of another group is not there for a lead who would take it back; the site admin's is for admins", async () => {
		const email = address();
		const { id } = await inviteMember(lead, { groupId: group.id, email, role: 'chemist' });
		expect((await refusal(() => revokeInvitation(outsider, id))).code).toBe('not-found');
		expect((await refusal(() => revokeInvitation(chemist, id))).code).toBe('not-allowed');
		expect((await refusal(() => revokeInvitation(lead, 'malformed'))).code).toBe('not-found');
		const made = await inviteAsAdmin(admin, { email: address(), siteAdmin: true });
		expect((await refusal(() => revokeInvitation(lead, made.id))).code).toBe('not-found');
		await revokeInvitation(admin, made.id);
	});

	it('by a site admin goes into any group or makes another admin', async () => {
		const email = address();
		await inviteAsAdmin(admin, { email, groupId: other.id, role: 'group_lead' });
		await acceptInvitation(await keyMailedTo(email), { name: 'Lead Person', ...password });
		const second = address();
		await inviteAsAdmin(admin, { email: second, siteAdmin: true });
		await acceptInvitation(await keyMailedTo(second), { name: 'Admin Person', ...password });
		expect((await User.findOne({ where: { email: second } }))!.siteAdmin).toBe(true);
		expect((await refusal(() => inviteAsAdmin(lead, { email, siteAdmin: true }))).code).toBe('not-found');
		expect((await refusal(() => inviteAsAdmin(admin, { email: address() }))).message).toMatch(
			/Choose a group/
		);
	});
});

describe('members of a group', () => {
	it('are listed for every member; invitations only for the lead', async () => {
		const forLead = await readGroup(lead, group.id);
		const forChemist = await readGroup(chemist, group.id);
		expect(forLead.canManage).toBe(true);
		expect(forLead.invitations.length).toBeGreaterThan(0);
		expect(forChemist.invitations).toEqual([]);
		expect(forChemist.members.map((m) => m.userId)).toContain(lead.userId);
		expect((await refusal(() => readGroup(outsider, group.id))).code).toBe('not-found');
		expect((await refusal(() => readGroup(admin, group.id))).code).toBe('not-found');
	});

	it('change role by the lead, with old and new on the trail', async () => {
		const user = await makePerson({ group, role: 'chemist' });
		await changeRole(lead, { groupId: group.id, userId: user.id, role: 'qa_reviewer' });
		expect(roleIn(await actorOf(user), group.id)).toBe('qa_reviewer');
		const event = await lastEvent();
		expect(event!.groupId).toBe(group.id);
		expect(JSON.parse(event!.payload)).toEqual({
			name: user.name,
			from: 'chemist',
			to: 'qa_reviewer'
		});
	});

	it('cannot be changed by others or from another group', async () => {
		const input = { groupId: group.id, userId: lead.userId, role: 'reader' as const };
		expect((await refusal(() => changeRole(chemist, input))).code).toBe('not-allowed');
		expect((await refusal(() => changeRole(outsider, input))).code).toBe('not-found');
		const foreign = { groupId: group.id, userId: outsider.userId, role: 'reader' as const };
		expect((await refusal(() => changeRole(lead, foreign))).code).toBe('not-found');
		expect((await refusal(() => removeMember(lead, foreign))).code).toBe('not-found');
	});

	it('keep one active lead', async () => {
		const small = await makeGroup();
		const only = await makeActor(small, 'group_lead');
		await makePerson({ group: small, role: 'group_lead', disabledAt: new Date() });
		const input = { groupId: small.id, userId: only.userId };
		expect((await refusal(() => changeRole(only, { ...input, role: 'chemist' }))).message).toMatch(
			/only group lead/
		);
		expect((await refusal(() => removeMember(only, input))).code).toBe('conflict');
		await makePerson({ group: small, role: 'group_lead' });
		await removeMember(only, input);
		expect(await Membership.count({ where: { groupId: small.id } })).toBe(2);
	});

	it('under GxP change only with a reason, and a dot is none', async () => {
		const gxp = await makeGroup({ gxp: true });
		const actor = await makeActor(gxp, 'group_lead');
		const user = await makePerson({ group: gxp });
		const input = { groupId: gxp.id, userId: user.id, role: 'reader' as const };
		for (const reason of ['', '.', '. . . . .', 'x'])
			expect((await refusal(() => changeRole(actor, { ...input, reason }))).message).toMatch(
				/in a few words why/
			);
		await changeRole(actor, { ...input, reason: 'moved to the pilot plant' });
		expect((await lastEvent())!.reason).toBe('moved to the pilot plant');
	});
});

describe('groups', () => {
	it('are made, listed and renamed by site admins only', async () => {
		const { id } = await createGroup(admin, { name: 'Tannery', gxp: true });
		expect((await listGroups(admin)).find((g) => g.id === id)).toMatchObject({ gxp: true, members: 0 });
		for (const work of [
			() => createGroup(lead, { name: 'Mine' }),
			() => listGroups(lead),
			() => changeGroup(lead, { groupId: group.id, version: 1, name: 'Mine' })
		])
			expect((await refusal(work)).code).toBe('not-found');
	});

	it('have names of their own', async () => {
		const taken = await refusal(() => createGroup(admin, { name: 'kiln lane 2' }));
		expect(taken).toMatchObject({ code: 'conflict', options: { fields: [{ field: 'name' }] } });
	});

	it('are not overwritten from a stale page, and leaving GxP needs a reason', async () => {
		const { id } = await createGroup(admin, { name: 'Saltern', gxp: true });
		const input = { groupId: id, version: 1, name: 'Saltern', gxp: false };
		expect((await refusal(() => changeGroup(admin, input))).message).toMatch(/few words why/);
		await changeGroup(admin, { ...input, reason: 'development work only from now on' });
		const stale = await refusal(() => changeGroup(admin, { ...input, name: 'Saltern 2' }));
		expect(stale).toMatchObject({ code: 'version-changed', options: { data: { gxp: false } } });
		expect((await refusal(() => changeGroup(admin, { ...input, groupId: crypto.randomUUID() }))).code).toBe(
			'not-found'
		);
	});
});

describe('people of the site', () => {
	it('are listed page by page and found by text, by site admins only', async () => {
		const marked = await makePerson({ name: 'Zephyrine Quill' });
		const found = await listPeople(admin, { text: 'zephyrine' });
		expect(found).toMatchObject({ total: 1, next: null, items: [{ id: marked.id }] });
		const first = await listPeople(admin, { limit: 3 });
		const second = await listPeople(admin, { limit: 3, after: first.next! });
		expect(first.items).toHaveLength(3);
		expect(second.items[0].id > first.items[2].id).toBe(true);
		expect((await refusal(() => listPeople(lead))).code).toBe('not-found');
	});
	it('keep one site admin who can sign in', async () => {
		await write((tx) => User.update({ siteAdmin: false }, { where: {}, transaction: tx }));
		await write((tx) => User.update({ siteAdmin: true }, { where: { id: admin.userId }, transaction: tx }));
		expect((await refusal(() => setSiteAdmin(admin, admin.userId, false))).code).toBe('conflict');
		expect((await refusal(() => setDisabled(admin, admin.userId, true))).code).toBe('conflict');
		expect((await refusal(() => setDisabled(admin, 'malformed', true))).code).toBe('not-found');
		expect((await refusal(() => setDisabled(lead, chemist.userId, true))).code).toBe('not-found');
	});
});

describe('a new password by mail', () => {
	it('is asked for with the same answer whether or not the address is known', async () => {
		const user = await makePerson({ password: 'forgotten, sadly' });
		const known = await askPasswordReset({ email: user.email, address: '192.0.2.20' });
		const unknown = await askPasswordReset({ email: 'nobody@kiln-lane.example', address: '192.0.2.21' });
		expect(known).toEqual(unknown);
		expect(await MailOutbox.count({ where: { to: 'nobody@kiln-lane.example' } })).toBe(0);
		expect(await MailOutbox.count({ where: { to: user.email } })).toBe(1);
	});
	it('is set once, ends the lockout and tells the trail', async () => {
		const user = await makePerson({ password: 'forgotten, sadly' });
		await askPasswordReset({ email: user.email, address: '192.0.2.22' });
		const key = await keyMailedTo(user.email);
		for (let i = 0; i < 5; i++)
			await refusal(() => signIn({ email: user.email, password: 'x', address: '192.0.2.23' }));
		expect(await readPasswordReset(key)).toEqual({ email: user.email });
		await resetPassword(key, password);
		expect((await lastEvent())!.type).toBe('person.password-changed');
		await signIn({ email: user.email, password: password.password, address: '192.0.2.23' });
		expect((await refusal(() => resetPassword(key, password))).code).toBe('not-found');
	});
	it('mails one link a minute at most', async () => {
		const user = await makePerson({ password: 'forgotten, sadly' });
		for (let i = 0; i < 3; i++) await askPasswordReset({ email: user.email, address: '192.0.2.24' });
		expect(await MailOutbox.count({ where: { to: user.email } })).toBe(1);
	});
	it('is refused for a link that never was', async () => {
		expect((await refusal(() => readPasswordReset('nonsense'))).code).toBe('not-found');
	});
});

describe('site settings', () => {
	const rule = { key: 'PS-04', title: 'Dosing of reactive material', link: '', contact: 'ext. 4410' };
	it('hold safety rules and thresholds that everybody reads and admins change, with the change on the trail', async () => {
		const before = await readSiteSettings();
		expect(before.safetyRules).toEqual([]);
		await saveSiteSettings(admin, {
			version: 0,
			safetyRules: [rule],
			thresholds: { ...before.thresholds, accumulationPercent: 10 }
		});
		expect(await readSiteSettings()).toMatchObject({
			safetyRules: [rule],
			thresholds: { accumulationPercent: 10 }
		});
		const event = await lastEvent();
		expect(JSON.parse(event!.payload)).toMatchObject({
			from: { safetyRules: [] },
			to: { safetyRules: [rule] }
		});
	});
	it('are not overwritten from a stale page, nor by others, nor with two rules of one key', async () => {
		const { thresholds } = await readSiteSettings();
		const save = (actor: Actor, version: number, safetyRules = [rule]) =>
			refusal(() => saveSiteSettings(actor, { version, safetyRules, thresholds }));
		expect((await save(admin, 0)).code).toBe('version-changed');
		expect((await save(lead, 1)).code).toBe('not-found');
		expect((await save(admin, 1, [rule, { ...rule, key: 'ps-04' }])).message).toMatch(/same key/);
	});
	it('take no link that could run a script', async () => {
		const { thresholds } = await readSiteSettings();
		const safetyRules = [{ ...rule, link: 'javascript:alert(1)' }];
		const refused = await refusal(() => saveSiteSettings(admin, { version: 1, safetyRules, thresholds }));
		expect(refused.message).toMatch(/https/);
	});
});
