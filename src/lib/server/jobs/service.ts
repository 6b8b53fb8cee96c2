import { registerFits } from '../fits/fit-job';
import { fitWorker } from '../fits/worker-source';
import type { BackgroundService } from '../startup';
import { stopEngine } from './engine-calls';
import { closeQueue, startQueue, stopQueue } from './queue';
import { closeStreams } from './stream';

/** Long computations: taken up again at the start, handed back at the stop. */
export const jobService: BackgroundService = {
	name: 'jobs',
	start() {
		registerFits(fitWorker);
		return startQueue();
	},
	announceStop() {
		closeQueue();
		closeStreams();
	},
	async stop() {
		closeStreams();
		stopEngine();
		await stopQueue();
	}
};
