import { ENGINE_VERSION } from '$lib/kinetics/version';
import { contentHash } from '../audit/canonical';
import { write } from '../database';
import { wake } from '../jobs/queue';
import type { Actor } from '../policy';
import { findFitJob } from './read-fit';
import { enqueueFit, type FitJobInput, type StartedFit } from './start-fit';

/**
 * The same request once more with the present engine, as a fit of its own: same scheme version, same run revisions, same
 * options and seed. The stored result stays as it is; the two can then be compared.
 */
export async function refit(actor: Actor, fitId: string): Promise<StartedFit> {
	const started = await write(async (tx) => {
		const job = await findFitJob(actor, fitId, 'fit.run');
		const input = job.input as FitJobInput;
		const inputHash = contentHash({
			request: input.request,
			schemeVersionId: input.scheme.versionId,
			runRevisionIds: input.runs.map((r) => r.revisionId),
			engineVersion: ENGINE_VERSION
		});
		return enqueueFit(tx, actor, { studyId: job.studyId!, groupId: job.groupId, input, inputHash });
	});
	if (!started.reused) void wake();
	return started;
}
