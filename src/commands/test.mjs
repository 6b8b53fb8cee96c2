/**
 * `npm test`: lint, types, unit, integration, build and browser tests, and one closing line that counts them.
 * Independent checks run two at a time; what one printed is shown when it ends.
 */
import { spawn } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { chromium } from './chromium.mjs';
import { requireNode } from './node-version.mjs';

requireNode();
const root = fileURLToPath(new URL('../..', import.meta.url));
const bin = (name) => path.join(root, 'node_modules', '.bin', name);
const reports = mkdtempSync(path.join(tmpdir(), 'ratewright-tests-'));
const browser = chromium();
let passed = 0;
let failed = 0;

/** Runs one check to its end; resolves to whether it succeeded. */
function check(title, command, args, env = {}) {
	const started = Date.now();
	return new Promise((resolve) => {
		const child = spawn(command, args, {
			cwd: root,
			env: { ...process.env, ...env },
			stdio: ['ignore', 'pipe', 'pipe']
		});
		let output = '';
		child.stdout.on('data', (chunk) => (output += chunk));
		child.stderr.on('data', (chunk) => (output += chunk));
		child.on('close', (code) => {
			const seconds = ((Date.now() - started) / 1000).toFixed(0);
			console.log(`\n── ${title}: ${code === 0 ? 'done' : 'FAILED'} in ${seconds} s\n${output.trimEnd()}`);
			resolve(code === 0);
		});
	});
}

/** A check without a test count of its own counts as one. */
async function single(title, command, args) {
	if (await check(title, command, args)) passed++;
	else failed++;
}

function count(report, ok) {
	if (!existsSync(report)) {
		failed++;
		return;
	}
	const json = JSON.parse(readFileSync(report, 'utf8'));
	const good = json.numPassedTests ?? json.stats?.expected ?? 0;
	const bad = json.numFailedTests ?? (json.stats ? json.stats.unexpected + json.stats.flaky : 0);
	passed += good;
	// A suite that could not be loaded fails without a failed test: it must not be lost from the count.
	failed += ok ? bad : Math.max(bad, 1);
}

async function vitest(project) {
	const report = path.join(reports, `${project}.json`);
	const ok = await check(`${project} tests`, bin('vitest'), [
		'run',
		'--project',
		project,
		'--reporter=default',
		'--reporter=json',
		`--outputFile.json=${report}`
	]);
	count(report, ok);
}

async function playwright() {
	const report = path.join(reports, 'e2e.json');
	const ok = await check('browser tests', bin('playwright'), ['test', '--reporter=line,json'], {
		CHROMIUM_PATH: browser,
		PLAYWRIGHT_JSON_OUTPUT_FILE: report
	});
	count(report, ok);
}

await single('SvelteKit types', bin('svelte-kit'), ['sync']);
const style = async () => {
	await single('ESLint', bin('eslint'), ['.']);
	await single('Prettier', bin('prettier'), ['--check', '--log-level', 'warn', '.']);
	await single('TypeScript and Svelte', bin('svelte-check'), [
		'--tsconfig',
		'./tsconfig.json',
		'--fail-on-warnings'
	]);
};
const logic = async () => {
	await vitest('unit');
	await vitest('integration');
};
await Promise.all([style(), logic()]);
const built = await check('build', 'npm', ['run', '--silent', 'build']);
if (built) {
	passed++;
	await playwright();
} else failed++;

rmSync(reports, { recursive: true, force: true });
console.log(`\n${passed} passed, ${failed} failed`);
process.exit(failed ? 1 : 0);
