/**
 * `npm run admin -- --email <address> --name "<name>"`: makes a site admin, the first one above all.
 * Prints a link with which that person sets a password; with --password-stdin the password is read from stdin.
 */
import { ZodError } from 'zod';
import { closeDatabase } from '$lib/server/database';
import { makeSiteAdmin } from '$lib/server/people/commands';
import { readArguments, reportAndExit, UsageError } from './arguments';

const USAGE = `Usage: npm run admin -- --email <address> --name "<name>" [--password-stdin]
  --email <address>   who becomes site admin; made if there is no such person yet
  --name <text>       the name as printed beside signatures
  --password-stdin    read the password from stdin instead of printing a link`;

async function readStdin(): Promise<string> {
	const parts: Buffer[] = [];
	for await (const part of process.stdin) parts.push(part as Buffer);
	return Buffer.concat(parts)
		.toString('utf8')
		.replace(/\r?\n$/, '');
}

async function main(): Promise<void> {
	const { values, flags } = readArguments(
		process.argv.slice(2),
		{ values: ['email', 'name'], flags: ['password-stdin'] },
		USAGE
	);
	if (!values.email || !values.name) throw new UsageError(`--email and --name are needed.\n\n${USAGE}`);
	try {
		const password = flags.has('password-stdin') ? await readStdin() : undefined;
		const { link, known } = await makeSiteAdmin({ email: values.email, name: values.name, password });
		if (link)
			process.stdout.write(`Open this link within 24 hours and set a password; it works once:\n${link}\n`);
		else if (known) process.stdout.write(`${values.email} is site admin and can sign in.\n`);
	} catch (error) {
		if (!(error instanceof ZodError)) throw error;
		throw new UsageError(error.issues[0].message);
	} finally {
		await closeDatabase();
	}
}

main().catch(reportAndExit);
