/** `npm run token -- …` and `npm run admin -- …`: runs a bundled command of the built service. */
import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { fail, requireNode } from './node-version.mjs';

requireNode();
const [name, ...rest] = process.argv.slice(2);
const entry = fileURLToPath(new URL(`../../build/commands/${name}.js`, import.meta.url));
if (!existsSync(entry))
	fail('The service has not been built yet.', 'Run `npm run build` first, then this command again.');
process.argv = [process.argv[0], entry, ...rest];
await import(entry);
