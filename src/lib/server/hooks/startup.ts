import { closeDatabase, database } from '../database';
import { log } from '../log';
import { settings } from '../settings';
import { BACKGROUND_SERVICES, type BackgroundService } from '../startup';

// Kept over hot reloads in development, where hooks are evaluated anew.
const globals = globalThis as { ratewrightRunning?: BackgroundService[] };

/** One person's request must never end the service for everybody: a rejection that nobody awaited is only logged. */
function logUnawaited(error: unknown): void {
	log().error({ err: error }, 'a rejection that nobody awaited');
}

/** Checks the settings, opens the database with every migration done, then starts what runs in the background. */
export async function startService(): Promise<void> {
	settings();
	process.off('unhandledRejection', logUnawaited).on('unhandledRejection', logUnawaited);
	await stopBackground();
	await database();
	const running: BackgroundService[] = [];
	globals.ratewrightRunning = running;
	for (const service of BACKGROUND_SERVICES) {
		await service.start();
		running.push(service);
	}
	log().info({ services: running.map((s) => s.name) }, 'started');
}

async function stopBackground(): Promise<void> {
	const running = globals.ratewrightRunning ?? [];
	globals.ratewrightRunning = undefined;
	for (const service of [...running].reverse()) {
		try {
			await service.stop();
		} catch (error) {
			log().error({ err: error, service: service.name }, 'did not stop cleanly');
		}
	}
}

/** At the signal: open event streams would hold up the server's closing, so they are ended at once. */
export function announceStop(): void {
	for (const service of globals.ratewrightRunning ?? []) service.announceStop?.();
}

/** Two phases: first everything in work comes to rest, then the database closes. */
export async function stopService(): Promise<void> {
	await stopBackground();
	await closeDatabase();
	log().info('stopped');
}
