import { spawnSync } from 'node:child_process';
import { existsSync } from 'node:fs';
import { fail } from './node-version.mjs';

const USUAL = ['/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome'];

const find = () => [process.env.CHROMIUM_PATH, ...USUAL].find((file) => file && existsSync(file));

/**
 * The browser for the end-to-end tests: found on the machine, or installed where that is possible
 * (Debian, as root); else a message that says how.
 * @returns {string}
 */
export function chromium() {
	const found = find();
	if (found) return found;
	if (process.getuid?.() === 0 && existsSync('/usr/bin/apt-get')) {
		console.log('Installing Chromium from Debian for the browser tests …');
		const run = (...args) =>
			spawnSync('apt-get', args, {
				stdio: ['ignore', 'ignore', 'inherit'],
				env: { ...process.env, DEBIAN_FRONTEND: 'noninteractive' }
			});
		run('update');
		run('install', '-y', '--no-install-recommends', 'chromium');
		const installed = find();
		if (installed) return installed;
	}
	return fail(
		'The browser tests need Chromium, which is not on this machine.',
		'On Debian: sudo apt-get install chromium. Elsewhere, name it: CHROMIUM_PATH=/path/to/chromium npm test'
	);
}
