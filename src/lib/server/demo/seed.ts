import { jobService } from '../jobs/service';
import { actorFor, createPeople, GROUPS } from './people';
import { seedCoupling } from './coupling';
import { seedRingClosure } from './ring-closure';

/** Fills an empty database: people and groups, one study finished through to a shared recipe, one in work. */
export async function seedDemo(): Promise<void> {
	await createPeople();
	await jobService.start();
	try {
		const [chemist, lead, reader] = await Promise.all([
			actorFor('chemist'),
			actorFor('lead'),
			actorFor('reader')
		]);
		const groupId = chemist.memberships.find((m) => m.groupName === GROUPS.route)!.groupId;
		const holderId = reader.memberships.find((m) => m.groupName === GROUPS.pilot)!.groupId;
		const cast = { chemist, lead, groupId, holderId };
		await seedCoupling(cast);
		await seedRingClosure(cast);
	} finally {
		await jobService.stop();
	}
}
