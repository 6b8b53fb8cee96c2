import path from 'node:path';
import { build, type Plugin, type ResolvedConfig } from 'vite';

const SUFFIX = '?nodeworker';

/**
 * Lets server code write `import source from './x.worker.ts?nodeworker'` and start
 * `new Worker(source, { eval: true })`, alike in dev, build and tests: the worker and all it
 * imports are bundled into one self-contained CommonJS string.
 */
export function nodeWorker(): Plugin {
	let config: ResolvedConfig;
	return {
		name: 'node-worker',
		enforce: 'pre',
		configResolved(resolved) {
			config = resolved;
		},
		async resolveId(id, importer) {
			if (!id.endsWith(SUFFIX)) return;
			const found = await this.resolve(id.slice(0, -SUFFIX.length), importer, { skipSelf: true });
			return found ? found.id + SUFFIX : undefined;
		},
		async load(id) {
			if (!id.endsWith(SUFFIX)) return;
			const chunk = await bundle(id.slice(0, -SUFFIX.length), config);
			for (const file of Object.keys(chunk.modules)) if (path.isAbsolute(file)) this.addWatchFile(file);
			return `export default ${JSON.stringify(chunk.code)};`;
		}
	};
}

interface Chunk {
	code: string;
	modules: Record<string, unknown>;
}

async function bundle(entry: string, config: ResolvedConfig): Promise<Chunk> {
	const result = await build({
		configFile: false,
		root: config.root,
		logLevel: 'warn',
		envDir: false,
		publicDir: false,
		mode: config.mode,
		resolve: { alias: { $lib: path.resolve(config.root, 'src/lib') } },
		ssr: { noExternal: true, target: 'node' },
		build: {
			ssr: entry,
			write: false,
			minify: false,
			sourcemap: false,
			target: 'node20',
			rollupOptions: { output: { format: 'cjs', codeSplitting: false } }
		}
	});
	const first = Array.isArray(result) ? result[0] : result;
	return (first as unknown as { output: [Chunk] }).output[0];
}
