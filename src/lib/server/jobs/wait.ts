import type { JobStatus } from '$lib/schemas/job';
import { Job } from '../database/models';
import { ENDED, isEnd, listen } from './events';

/** Waits until a job has ended, for commands that have nothing else to do meanwhile. */
export async function jobEnd(jobId: string): Promise<JobStatus> {
	const status = async (): Promise<JobStatus | undefined> =>
		(await Job.findByPk(jobId, { attributes: ['id', 'status'] }))?.status;
	let stop: () => void = () => undefined;
	const told = new Promise<void>((resolve) => {
		stop = listen(jobId, (event) => {
			if (isEnd(event.type)) resolve();
		});
	});
	try {
		const now = await status();
		if (!now) throw new Error(`There is no job ${jobId}.`);
		if (ENDED.includes(now)) return now;
		await told;
		return (await status())!;
	} finally {
		stop();
	}
}
