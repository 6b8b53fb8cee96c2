/** Fills an empty database with the invented demonstration; leaves one that has people in it as it is. */
import { closeDatabase, database } from '$lib/server/database';
import { User } from '$lib/server/database/models';
import { DEMO_PASSWORD, GROUPS, PEOPLE } from '$lib/server/demo/people';
import { seedDemo } from '$lib/server/demo/seed';

function announce(fresh: boolean): void {
	const width = Math.max(...PEOPLE.map((p) => p.email.length));
	const rows = PEOPLE.map((p) => {
		const roles = p.siteAdmin
			? 'site admin'
			: p.roles.map(([g, r]) => `${r.replace('_', ' ')} in ${g}`).join(', ');
		return `  ${p.email.padEnd(width)}  ${p.name}, ${roles}`;
	});
	console.log(
		[
			'',
			fresh
				? 'The demonstration has been filled in (people, groups and compounds are invented).'
				: 'The demonstration data are kept as they were; --fresh starts over.',
			'',
			`  Ratewright: ${process.env.ORIGIN ?? 'http://localhost:4300'}`,
			'',
			`  Sign in as (password for all: ${DEMO_PASSWORD}):`,
			...rows,
			'',
			`  Groups: ${Object.values(GROUPS).join(', ')}. Mail goes to a mailbox that the site admin reads in the browser.`,
			'  Ctrl-C stops the service.',
			''
		].join('\n')
	);
}

async function main(): Promise<void> {
	await database();
	const fresh = (await User.count()) === 0;
	if (fresh) await seedDemo();
	await closeDatabase();
	announce(fresh);
}

main()
	.then(() => process.exit(0))
	.catch((error: Error) => {
		console.error(`\nThe demonstration could not be filled in: ${error.stack ?? error.message}\n`);
		process.exit(1);
	});
