import { write } from '../database';
import { Job } from '../database/models';
import { log } from '../log';
import { addEvent, tellListeners } from './events';

const PROGRESS_EVERY_MS = 300;

/** Writes how far a job is; keeps only the newest of what comes in faster than it is worth writing down. */
export function progressWriter(jobId: string, isRunning: () => boolean): (progress: unknown) => void {
	let newest: unknown;
	let waiting = false;
	const save = async (): Promise<void> => {
		waiting = false;
		if (!isRunning()) return;
		const progress = newest;
		try {
			const event = await write(async (tx) => {
				const [count] = await Job.update(
					{ progress: progress as object, heartbeatAt: new Date() },
					{ where: { id: jobId, status: 'running' }, transaction: tx }
				);
				return count === 1 ? addEvent(tx, jobId, 'progress', progress) : null;
			});
			if (event) tellListeners(jobId, event);
		} catch (error) {
			log().warn({ err: error, jobId }, 'progress not written');
		}
	};
	return (progress) => {
		newest = progress;
		if (waiting) return;
		waiting = true;
		setTimeout(() => void save(), PROGRESS_EVERY_MS);
	};
}
