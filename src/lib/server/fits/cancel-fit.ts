import { AppError } from '../errors';
import { cancelJob } from '../jobs/queue';
import type { Actor } from '../policy';
import { findFitJob } from './read-fit';

const SLIM = { withoutInput: true };

/** Calls a fit off; when this returns, its end is on record. What has ended stays as it is. */
export async function cancelFit(actor: Actor, fitId: string): Promise<{ id: string; status: 'cancelled' }> {
	const job = await findFitJob(actor, fitId, 'fit.run', SLIM);
	if (job.status !== 'cancelled' && !(await cancelJob(job.id, actor)))
		throw new AppError('wrong-state', 'This fit has ended already; its record stays.');
	const after = await findFitJob(actor, fitId, 'fit.run', SLIM);
	if (after.status !== 'cancelled')
		throw new AppError('wrong-state', 'This fit ended before it could be called off; its record stays.');
	return { id: job.id, status: 'cancelled' };
}
