import { hashPassword } from '../../../src/lib/server/auth/password';
import { toActor } from '../../../src/lib/server/auth/actor';
import { write } from '../../../src/lib/server/database';
import { Group, Membership, User } from '../../../src/lib/server/database/models';
import type { Actor, Role, Scope } from '../../../src/lib/server/policy';

let counter = 0;

/** A lab group with an invented name. */
export function makeGroup(overrides: Partial<{ name: string; gxp: boolean }> = {}): Promise<Group> {
	counter++;
	return write((tx) => Group.create({ name: `Group ${counter}`, ...overrides }, { transaction: tx }));
}

export interface PersonOverrides {
	name?: string;
	email?: string;
	siteAdmin?: boolean;
	disabledAt?: Date | null;
	/** Left out, the person has no password (which makes tests quicker). */
	password?: string;
	/** Memberships to be given: one group with a role, or several. */
	group?: Group | string;
	role?: Role;
	memberships?: { group: Group | string; role: Role }[];
}

const idOf = (group: Group | string): string => (typeof group === 'string' ? group : group.id);

/** A person with an invented name; `{group, role}` makes them a member. */
export async function makePerson(overrides: PersonOverrides = {}): Promise<User> {
	counter++;
	const { password, group, role, memberships = [], ...fields } = overrides;
	const all = [...memberships, ...(group ? [{ group, role: role ?? ('chemist' as const) }] : [])];
	const passwordHash = password === undefined ? null : await hashPassword(password);
	return write(async (tx) => {
		const user = await User.create(
			{ name: `Person ${counter}`, email: `person${counter}@kiln-lane.example`, passwordHash, ...fields },
			{ transaction: tx }
		);
		for (const m of all)
			await Membership.create({ userId: user.id, groupId: idOf(m.group), role: m.role }, { transaction: tx });
		return user;
	});
}

/** The actor that a request of this person would have, as the database stands now. */
export async function actorOf(
	user: User,
	overrides: Partial<Pick<Actor, 'source' | 'signedInAt'>> & { scopes?: Scope[] } = {}
): Promise<Actor> {
	const source = overrides.scopes ? 'token: test' : 'screen';
	const actor = await toActor(user, source, overrides.scopes ? null : new Date());
	return { ...actor, ...overrides };
}

/** Shorthand: a new person in this role of this group, as actor. */
export async function makeActor(group: Group | string, role: Role = 'chemist'): Promise<Actor> {
	return actorOf(await makePerson({ group, role }));
}
