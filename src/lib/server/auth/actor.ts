import type { AuditActor } from '../audit/append';
import { EndedSession, Group, Membership, User } from '../database/models';
import type { Actor } from '../policy';

/** What a session proves; whether it still holds is asked of the database at each request. */
export interface SessionPerson {
	userId: string;
	epoch: number;
	/** ISO 8601 time at which the password was given. */
	signedInAt: string;
}

export async function membershipsOf(userId: string): Promise<Actor['memberships']> {
	const rows = await Membership.findAll({ where: { userId } });
	const groups = await Group.findAll({ where: { id: rows.map((m) => m.groupId) }, order: [['name', 'ASC']] });
	return groups.map((group) => ({
		groupId: group.id,
		groupName: group.name,
		role: rows.find((m) => m.groupId === group.id)!.role
	}));
}

export async function toActor(user: User, source: string, signedInAt: Date | null): Promise<Actor> {
	return {
		userId: user.id,
		name: user.name,
		email: user.email,
		siteAdmin: user.siteAdmin,
		memberships: await membershipsOf(user.id),
		source,
		signedInAt
	};
}

/** The person of a session, or null when disabled since, or when this or every session was ended. */
export async function readActor(session: SessionPerson): Promise<Actor | null> {
	const signedInAt = new Date(session.signedInAt);
	const [user, ended] = await Promise.all([
		User.findByPk(session.userId),
		EndedSession.count({ where: { userId: session.userId, signedInAt } })
	]);
	if (!user || user.disabledAt || user.sessionEpoch !== session.epoch || ended > 0) return null;
	return toActor(user, 'screen', signedInAt);
}

/** For the trail: somebody who acts on a page without being signed in, such as by a link from a mail. */
export const asPerson = (user: User): AuditActor => ({
	userId: user.id,
	name: user.name,
	source: 'screen',
	memberships: [],
	siteAdmin: false
});

/** For the trail: somebody at a public page whom nothing identifies. */
export const UNKNOWN_PERSON: AuditActor = {
	userId: null,
	name: 'Unknown person',
	source: 'screen',
	memberships: [],
	siteAdmin: false
};
