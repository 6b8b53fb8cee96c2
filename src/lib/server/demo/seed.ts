import { actorFor, createPeople, GROUPS } from './people';
import { seedRingClosure } from './ring-closure';

/** Fills an empty database: people and groups, one study finished through to a shared recipe, one in work. */
export async function seedDemo(): Promise<void> {
	await createPeople();
	const [chemist, lead] = await Promise.all([actorFor('chemist'), actorFor('lead')]);
	const groupId = chemist.memberships.find((m) => m.groupName === GROUPS.route)!.groupId;
	await seedRingClosure({ chemist, lead, groupId });
}
