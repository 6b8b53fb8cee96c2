/**
 * Run before the service starts: reads the settings and opens the database (migrations included), and says in
 * plain words what is wrong, instead of a stack trace from the depth of the server.
 */
import { constants, accessSync, existsSync, mkdirSync } from 'node:fs';
import { dirname, resolve } from 'node:path';
import { openDatabase } from '$lib/server/database';
import { parseSettings } from '$lib/server/settings';

function checkWritable(file: string): void {
	const folder = dirname(resolve(file));
	mkdirSync(folder, { recursive: true });
	accessSync(folder, constants.W_OK | constants.R_OK);
	if (existsSync(file)) accessSync(file, constants.W_OK | constants.R_OK);
}

async function main(): Promise<void> {
	const settings = parseSettings(process.env);
	const file = settings.DATABASE_FILE;
	try {
		checkWritable(file);
		await (await openDatabase(file)).close();
	} catch (error) {
		throw new Error(
			`The database ${file} cannot be opened for writing (${(error as Error).message}).\n` +
				'Give this account the right to write there, or name another file with DATABASE_FILE.',
			{ cause: error }
		);
	}
}

main().catch((error: Error) => {
	console.error(`\n${error.message}\n`);
	process.exit(1);
});
