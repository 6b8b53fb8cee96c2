/**
 * `npm run demo`: builds, migrates, fills in the invented demonstration and serves it on localhost until Ctrl-C.
 * Options: --fresh starts over with new data; --port 4301 serves elsewhere.
 */
import { spawn, spawnSync } from 'node:child_process';
import { randomBytes } from 'node:crypto';
import {
	accessSync,
	constants,
	existsSync,
	mkdirSync,
	readFileSync,
	readdirSync,
	rmSync,
	statSync,
	writeFileSync
} from 'node:fs';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { fail, requireNode } from './node-version.mjs';
import { portIsFree } from './port.mjs';

requireNode();
const root = fileURLToPath(new URL('../..', import.meta.url));
const folder = process.env.DEMO_FOLDER
	? path.resolve(process.env.DEMO_FOLDER)
	: path.join(root, 'data', 'demo');
const { fresh, port } = readArguments(process.argv.slice(2));

/** @param {string[]} args */
function readArguments(args) {
	const known = { fresh: false, port: Number(process.env.PORT ?? 4300) };
	for (let i = 0; i < args.length; i++) {
		if (args[i] === '--fresh') known.fresh = true;
		else if (args[i] === '--port') known.port = Number(args[++i]);
		else fail(`Unknown option ${args[i]}.`, 'Known options: --fresh, --port <number>.');
	}
	if (!Number.isInteger(known.port) || known.port < 1 || known.port > 65535)
		fail('The port is not a number between 1 and 65535.', 'Example: npm run demo -- --port 4301');
	return known;
}

/** Newest change below a folder, so that an unchanged tree is not built twice. */
function newest(dir) {
	let latest = 0;
	for (const entry of readdirSync(dir, { withFileTypes: true })) {
		const full = path.join(dir, entry.name);
		latest = Math.max(latest, entry.isDirectory() ? newest(full) : statSync(full).mtimeMs);
	}
	return latest;
}

function buildIfNeeded() {
	const stamp = path.join(root, 'build', 'commands', 'seed.js');
	const sources = ['src', 'static'].map((d) => newest(path.join(root, d)));
	const configs = ['package.json', 'svelte.config.js', 'vite.config.ts'].map(
		(f) => statSync(path.join(root, f)).mtimeMs
	);
	if (existsSync(stamp) && statSync(stamp).mtimeMs > Math.max(...sources, ...configs)) return;
	if (!existsSync(path.join(root, 'node_modules')))
		fail('The packages are not installed yet.', 'Run `npm ci` first, then `npm run demo` again.');
	console.log('Building the application (about half a minute) …');
	const built = spawnSync('npm', ['run', '--silent', 'build'], { cwd: root, encoding: 'utf8' });
	if (built.status !== 0) fail(`The build failed:\n${built.stdout}\n${built.stderr}`);
}

function prepareFolder() {
	try {
		if (fresh) rmSync(folder, { recursive: true, force: true });
		mkdirSync(folder, { recursive: true });
		accessSync(folder, constants.W_OK);
	} catch (error) {
		fail(
			`The folder ${folder} cannot be written (${error.message}).`,
			'Give this account the right to write there, or name another with DEMO_FOLDER=/path.'
		);
	}
}

/** The session key is kept beside the data, so that people stay signed in over a restart. */
function secret() {
	const file = path.join(folder, 'session-key');
	if (!existsSync(file)) writeFileSync(file, randomBytes(33).toString('base64'), { mode: 0o600 });
	return readFileSync(file, 'utf8').trim();
}

function environment() {
	const env = {
		...process.env,
		DEMO: '1',
		DATABASE_FILE: path.join(folder, 'ratewright.sqlite'),
		AUTH_SECRET: secret(),
		PORT: String(port),
		HOST: '127.0.0.1',
		ORIGIN: `http://localhost:${port}`,
		SITE_NAME: process.env.SITE_NAME ?? 'Kiln Lane (invented site)',
		LOG_LEVEL: process.env.LOG_LEVEL ?? 'warn'
	};
	delete env.SMTP_URL;
	return env;
}

if (!(await portIsFree(port, '127.0.0.1').catch(() => false)))
	fail(
		`Port ${port} is taken by another program.`,
		`Stop that program, or serve elsewhere: npm run demo -- --port ${port + 1}`
	);
prepareFolder();
buildIfNeeded();
const env = environment();
const seeded = spawnSync(process.execPath, [path.join(root, 'build/commands/seed.js')], {
	cwd: root,
	env,
	stdio: 'inherit'
});
if (seeded.status !== 0) process.exit(seeded.status ?? 1);

const server = spawn(process.execPath, [path.join(root, 'src/commands/start.mjs')], {
	cwd: root,
	env,
	stdio: 'inherit'
});
for (const signal of ['SIGINT', 'SIGTERM']) process.on(signal, () => server.kill('SIGTERM'));
server.on('exit', (code, signal) => process.exit(code ?? (signal === 'SIGTERM' ? 0 : 1)));
