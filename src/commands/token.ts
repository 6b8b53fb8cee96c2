/**
 * `npm run --silent token -- --email <person> --scopes read,write`: prints an API token for a person's scripts.
 * The token stands alone on stdout, so that a script can take it; it cannot be shown again.
 */
import { ZodError } from 'zod';
import { SCOPE_CODES } from '$lib/schemas/people';
import { closeDatabase } from '$lib/server/database';
import { issueTokenFor } from '$lib/server/people/commands';
import { readArguments, reportAndExit, UsageError } from './arguments';

const USAGE = `Usage: npm run --silent token -- --email <person> [options]
  --email <address>   whose token it is; it may do at most what this person may
  --scopes <list>     of ${SCOPE_CODES.join(', ')}, with commas (default: read)
  --days <number>     how long it works, 1 to 366 (default: 90)
  --name <text>       what it is for (default: command line)`;

async function main(): Promise<void> {
	const { values } = readArguments(
		process.argv.slice(2),
		{ values: ['email', 'scopes', 'days', 'name'], flags: [] },
		USAGE
	);
	if (!values.email) throw new UsageError(`Say whose token it is with --email.\n\n${USAGE}`);
	try {
		const { token, expiresAt } = await issueTokenFor({
			email: values.email,
			scopes: (values.scopes ?? 'read').split(',').map((s) => s.trim()),
			days: Number(values.days ?? 90),
			name: values.name ?? 'command line'
		});
		process.stdout.write(`${token}\n`);
		process.stderr.write(`Works until ${expiresAt.toISOString().slice(0, 10)}. It is not shown again.\n`);
	} catch (error) {
		if (!(error instanceof ZodError)) throw error;
		const [issue] = error.issues;
		throw new UsageError(`--${String(issue.path[0])}: ${issue.message}\n\n${USAGE}`);
	} finally {
		await closeDatabase();
	}
}

main().catch(reportAndExit);
