import type { Tx } from '../database';
import { Run, RunRevision } from '../database/models';
import { notFound } from '../errors';
import { isId } from '../ids';
import { requireCan, type Action, type Actor } from '../policy';
import { groupsInSight } from '../studies/find';

export async function findRun(actor: Actor, runId: unknown, action: Action, tx?: Tx): Promise<Run> {
	if (!isId(runId)) throw notFound('run');
	const run = await Run.findOne({ where: { id: runId, groupId: groupsInSight(actor) }, transaction: tx });
	if (!run) throw notFound('run');
	requireCan(actor, run.groupId, action, 'run');
	return run;
}

export interface RunWithRevision {
	run: Run;
	revision: RunRevision;
}

/** Current revisions of these runs of a study, in the order asked for; one that is not there is an error. */
export async function currentRevisions(
	studyId: string,
	runIds: string[],
	tx?: Tx
): Promise<RunWithRevision[]> {
	if (!runIds.every(isId)) throw notFound('run');
	const runs = await Run.findAll({ where: { id: runIds, studyId }, transaction: tx });
	const revisions = await RunRevision.findAll({
		where: { id: runs.map((r) => r.currentRevisionId).filter((id) => id !== null) },
		transaction: tx
	});
	return runIds.map((id) => {
		const run = runs.find((r) => r.id === id);
		const revision = revisions.find((r) => r.id === run?.currentRevisionId);
		if (!run || !revision) throw notFound('run');
		return { run, revision };
	});
}
