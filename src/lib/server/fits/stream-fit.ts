import { ENDED } from '../jobs/events';
import { eventStream } from '../jobs/stream';
import type { Actor } from '../policy';
import { findFitJob } from './read-fit';

/** The numbered events of a fit, from the one after `lastEventId` on. */
export async function streamFit(actor: Actor, fitId: string, lastEventId: number): Promise<Response> {
	const job = await findFitJob(actor, fitId, 'study.read', { withoutInput: true });
	return eventStream(job.id, ENDED.includes(job.status), lastEventId);
}
