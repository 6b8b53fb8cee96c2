import { appendAudit, SYSTEM } from '../audit/append';
import { toActor } from '../auth/actor';
import { hashPassword } from '../auth/password';
import { write, type Tx } from '../database';
import { Group, Membership, User } from '../database/models';
import type { Actor, Role } from '../policy';

/** All people, groups, sites and compounds of the demonstration are invented. */
export const DEMO_PASSWORD = 'amber-glass-demo';

interface DemoPerson {
	key: string;
	name: string;
	email: string;
	siteAdmin?: boolean;
	roles: [groupName: string, role: Role][];
}

export const GROUPS = { route: 'Route Development', kilo: 'Kilo Lab', pilot: 'Pilot Hall' } as const;

export const PEOPLE: DemoPerson[] = [
	{
		key: 'chemist',
		name: 'Mira Okafor',
		email: 'mira.okafor@kilnlane.example',
		roles: [[GROUPS.route, 'chemist']]
	},
	{
		key: 'lead',
		name: 'Tunde Adeyemi',
		email: 'tunde.adeyemi@kilnlane.example',
		roles: [
			[GROUPS.route, 'group_lead'],
			[GROUPS.kilo, 'chemist']
		]
	},
	{
		key: 'qa',
		name: 'Ines Vogel',
		email: 'ines.vogel@kilnlane.example',
		roles: [
			[GROUPS.route, 'qa_reviewer'],
			[GROUPS.kilo, 'qa_reviewer']
		]
	},
	{
		key: 'reader',
		name: 'Jonas Reyes',
		email: 'jonas.reyes@kilnlane.example',
		roles: [
			[GROUPS.pilot, 'reader'],
			[GROUPS.kilo, 'group_lead']
		]
	},
	{ key: 'admin', name: 'Sam Whitlock', email: 'site.admin@kilnlane.example', siteAdmin: true, roles: [] }
];

async function createGroup(tx: Tx, name: string): Promise<Group> {
	const group = await Group.create({ name }, { transaction: tx });
	await appendAudit(tx, SYSTEM, {
		type: 'group.created',
		payload: { name, gxp: false },
		groupId: group.id,
		objectType: 'group',
		objectId: group.id
	});
	return group;
}

async function createPerson(
	tx: Tx,
	person: DemoPerson,
	passwordHash: string,
	groups: Map<string, Group>
): Promise<void> {
	const { name, email, siteAdmin = false } = person;
	const user = await User.create({ name, email, siteAdmin, passwordHash }, { transaction: tx });
	await appendAudit(tx, SYSTEM, {
		type: 'person.created',
		payload: { name, email, siteAdmin },
		objectType: 'person',
		objectId: user.id
	});
	for (const [groupName, role] of person.roles) {
		const groupId = groups.get(groupName)!.id;
		await Membership.create({ userId: user.id, groupId, role }, { transaction: tx });
		await appendAudit(tx, SYSTEM, {
			type: 'member.joined',
			payload: { name, role },
			groupId,
			objectType: 'person',
			objectId: user.id
		});
	}
}

export async function createPeople(): Promise<void> {
	const passwordHash = await hashPassword(DEMO_PASSWORD);
	await write(async (tx) => {
		const groups = new Map<string, Group>();
		for (const name of Object.values(GROUPS)) groups.set(name, await createGroup(tx, name));
		for (const person of PEOPLE) await createPerson(tx, person, passwordHash, groups);
	});
}

/** The person as an actor who has just signed in on a page. */
export async function actorFor(key: string): Promise<Actor> {
	const { email } = PEOPLE.find((p) => p.key === key)!;
	const user = await User.findOne({ where: { email }, rejectOnEmpty: true });
	return toActor(user, 'screen', new Date());
}
