/**
 * Bundles the command-line entries (token, admin, seed, preflight) into build/commands, so that they run
 * from the built service alone, with the same use cases and policy as the pages.
 */
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { build, runnerImport } from 'vite';

const root = fileURLToPath(new URL('../..', import.meta.url));
const ENTRIES = ['token', 'admin', 'seed', 'preflight'];

const { module } = await runnerImport(path.join(root, 'src/build/node-worker.ts'));

await build({
	configFile: false,
	root,
	logLevel: 'warn',
	envDir: false,
	publicDir: false,
	plugins: [module.nodeWorker()],
	resolve: { alias: { $lib: path.join(root, 'src/lib') } },
	ssr: { target: 'node' },
	build: {
		ssr: true,
		outDir: 'build/commands',
		emptyOutDir: true,
		target: 'node20',
		minify: false,
		rollupOptions: {
			input: Object.fromEntries(ENTRIES.map((name) => [name, path.join(root, `src/commands/${name}.ts`)]))
		}
	}
});
