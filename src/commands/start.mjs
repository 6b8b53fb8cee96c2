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
// A name that is set to nothing counts as not set, as it does for every setting.
for (const name of [
	'NODE_ENV',
	'PORT',
	'HOST',
	'ORIGIN',
	'BODY_SIZE_LIMIT',
	'SHUTDOWN_TIMEOUT',
	'UPLOAD_LIMIT_MB'
])
	if (env[name] === '') delete env[name];
env.NODE_ENV ??= 'production';
if (env.ORIGIN && !URL.canParse(env.ORIGIN))
	fail(`ORIGIN is "${env.ORIGIN}".`, 'It must be the full address, e.g. ORIGIN=http://localhost:4300');
env.PORT ??= new URL(env.ORIGIN ?? 'http://localhost:4300').port || '4300';
if (!/^\d{1,5}$/.test(env.PORT) || Number(env.PORT) > 65535)
	fail(`PORT is "${env.PORT}".`, 'It must be a number between 1 and 65535, e.g. PORT=4300');
env.HOST ??= '127.0.0.1';
env.ORIGIN ??= `http://localhost:${env.PORT}`;
// Room for the multipart frame round the largest sheet that is accepted.
env.BODY_SIZE_LIMIT ??= `${Number(env.UPLOAD_LIMIT_MB ?? 20) + 2}M`;
// Below the ten seconds after which most service managers end a program by force.
env.SHUTDOWN_TIMEOUT ??= '8';

const checked = spawnSync(process.execPath, [at('commands/preflight.js')], { stdio: 'inherit', env });
if (checked.status !== 0) process.exit(checked.status ?? 1);
const free = await portIsFree(Number(env.PORT), env.HOST).catch((error) =>
	fail(
		`The service cannot listen on ${env.HOST}, port ${env.PORT} (${error.message}).`,
		'Change HOST or PORT.'
	)
);
if (!free)
	fail(
		`Port ${env.PORT} on ${env.HOST} is taken by another program.`,
		'Stop that program, or choose another port with PORT=4301 (and ORIGIN to match).'
	);

await import(at('index.js'));
