import { jobService } from '../jobs/service';
import { DEFAULT_SITE_SETTINGS, saveSiteSettings } from '../people/site-settings';
import { actorFor, createPeople, GROUPS } from './people';
import { seedCoupling } from './coupling';
import { seedRingClosure } from './ring-closure';

/** Rules of the invented site; the links lead nowhere on purpose. */
const SAFETY_RULES = [
	{
		key: 'PS-04',
		title: 'Thermal assessment before scale-up',
		link: 'https://kilnlane.example/rules/ps-04',
		contact: 'process safety (invented), ext. 4410'
	},
	{
		key: 'PS-11',
		title: 'Hold times and in-process control',
		link: 'https://kilnlane.example/rules/ps-11',
		contact: 'process safety (invented), ext. 4410'
	}
];

/** Fills an empty database: people and groups, one study finished through to a shared recipe, one in work. */
export async function seedDemo(): Promise<void> {
	await createPeople();
	await jobService.start();
	try {
		await saveSiteSettings(await actorFor('admin'), {
			...DEFAULT_SITE_SETTINGS,
			safetyRules: SAFETY_RULES,
			version: 0
		});
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
