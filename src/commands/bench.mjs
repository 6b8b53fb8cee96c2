/**
 * `npm run bench [-- --quick]`: the engine's accuracy and speed, beside NumPy and SciPy where python3 has them.
 */
import { spawn } from 'node:child_process';
import { mkdtemp, rm } from 'node:fs/promises';
import os from 'node:os';
import path from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { build } from 'vite';

const root = fileURLToPath(new URL('../..', import.meta.url));

/**
 * Bundles the benchmark into a folder and imports it.
 * @param {string} folder
 * @returns {Promise<{ runBench: (log: (line: string) => void, options: object) => Promise<void> }>}
 */
async function load(folder) {
	await build({
		configFile: false,
		root,
		logLevel: 'error',
		envDir: false,
		publicDir: false,
		resolve: { alias: { $lib: path.join(root, 'src/lib') } },
		ssr: { noExternal: true, target: 'node' },
		build: {
			ssr: path.join(root, 'src/lib/kinetics/bench/main.ts'),
			outDir: folder,
			emptyOutDir: true,
			minify: false,
			target: 'node20',
			rollupOptions: { output: { format: 'es', entryFileNames: 'bench.mjs' } }
		}
	});
	return import(pathToFileURL(path.join(folder, 'bench.mjs')).href);
}

/**
 * Runs a Python program on one thread; null when python3 or what it imports is missing.
 * @param {string} program
 * @returns {Promise<string | null>}
 */
function python(program) {
	const env = { ...process.env, OMP_NUM_THREADS: '1', OPENBLAS_NUM_THREADS: '1', MKL_NUM_THREADS: '1' };
	return new Promise((resolve) => {
		const child = spawn('python3', ['-'], { env, stdio: ['pipe', 'pipe', 'pipe'] });
		let printed = '';
		let complaint = '';
		child.stdout.on('data', (chunk) => (printed += String(chunk)));
		child.stderr.on('data', (chunk) => (complaint += String(chunk)));
		child.stdin.on('error', () => {});
		child.on('error', () => resolve(null));
		child.on('close', (code) => {
			if (code !== 0 && !/No module named/.test(complaint)) process.stderr.write(complaint);
			resolve(code === 0 ? printed : null);
		});
		child.stdin.end(program);
	});
}

const folder = await mkdtemp(path.join(os.tmpdir(), 'ratewright-bench-'));
try {
	const { runBench } = await load(folder);
	const quick = process.argv.includes('--quick');
	await runBench((line) => console.log(line), { quick, python });
} finally {
	await rm(folder, { recursive: true, force: true });
}
