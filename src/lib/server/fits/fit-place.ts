import type { JobStatus } from '$lib/schemas/job';
import { aheadOf } from '../jobs/waiting';
import type { Actor } from '../policy';
import { findFitJob } from './read-fit';

/** Where a fit stands in the queue: how many will be begun before it; null once it is begun. */
export async function fitPlace(
	actor: Actor,
	fitId: string
): Promise<{ status: JobStatus; ahead: number | null }> {
	const { id, status } = await findFitJob(actor, fitId, 'study.read', { withoutInput: true });
	return { status, ahead: status === 'queued' ? await aheadOf(id) : null };
}
