import { defineConfig } from '@playwright/test';

const PORT = Number(process.env.E2E_PORT ?? 4390);
/** Set to test a service that runs already, instead of starting one. */
const RUNNING = process.env.E2E_BASE_URL;

/** The browser tests run against the built service with the invented demonstration data in a folder of their own. */
export default defineConfig({
	testDir: 'tests/e2e',
	fullyParallel: false,
	workers: 1,
	reporter: [['line']],
	timeout: 60_000,
	expect: { timeout: 10_000 },
	outputDir: 'test-results',
	globalTimeout: 10 * 60_000,
	use: {
		baseURL: RUNNING ?? `http://localhost:${PORT}`,
		locale: 'en-GB',
		timezoneId: 'Europe/Vienna',
		viewport: { width: 1440, height: 1000 },
		launchOptions: {
			executablePath: process.env.CHROMIUM_PATH ?? '/usr/bin/chromium',
			args: [
				'--no-sandbox',
				'--disable-gpu',
				'--disable-quic',
				'--no-first-run',
				'--disable-background-networking',
				'--disable-component-update',
				'--disable-sync'
			]
		}
	},
	webServer: RUNNING
		? undefined
		: {
				command: `node src/commands/demo.mjs --fresh --port ${PORT}`,
				url: `http://localhost:${PORT}/healthz`,
				reuseExistingServer: false,
				timeout: 180_000,
				stdout: 'ignore',
				stderr: 'pipe',
				gracefulShutdown: { signal: 'SIGTERM', timeout: 10_000 },
				env: { DEMO_FOLDER: 'test-results/demo', SIGN_IN_ATTEMPTS: '50', API_LIMIT_PER_MINUTE: '10000' }
			}
});
