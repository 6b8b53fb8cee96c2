/** `npm start`: checks settings, database and port, then serves the built application. */
import { existsSync } from 'node:fs';
import { spawnSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import { fail, requireNode } from './node-version.mjs';
import { portIsFree } from './port.mjs';

requireNode();
const at = (file) => fileURLToPath(new URL(`../../build/${file}`, import.meta.url));
if (!existsSync(at('index.js'))) fail('There is no build to serve.', 'Run `npm run build` first.');

const env = process.env;
env.NODE_ENV ??= 'production';
env.PORT ??= new URL(env.ORIGIN ?? 'http://localhost:4300').port || '4300';
env.HOST ??= '127.0.0.1';
env.ORIGIN ??= `http://localhost:${env.PORT}`;
// Room for the multipart frame round the largest sheet that is accepted.
env.BODY_SIZE_LIMIT ??= `${Number(env.UPLOAD_LIMIT_MB ?? 20) + 2}M`;
env.SHUTDOWN_TIMEOUT ??= '10';

const checked = spawnSync(process.execPath, [at('commands/preflight.js')], { stdio: 'inherit', env });
if (checked.status !== 0) process.exit(checked.status ?? 1);
if (!(await portIsFree(Number(env.PORT), env.HOST)))
	fail(
		`Port ${env.PORT} on ${env.HOST} is taken by another program.`,
		'Stop that program, or choose another port with PORT=4301 (and ORIGIN to match).'
	);

await import(at('index.js'));
