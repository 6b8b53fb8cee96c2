import { appendAudit } from '../audit/append';
import { write } from '../database';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { findRun } from './find';
import {
	aboutRun,
	addRevision,
	currentRevision,
	requireReason,
	requireRunVersion,
	type SavedRevision
} from './revisions';

export interface RestorePointInput {
	runId: string;
	version: number;
	index: number;
	channel: string | null;
	reason: string;
}

/** Takes an exclusion back, with the reason; both stay in the run's history. */
export async function restorePoint(actor: Actor, input: RestorePointInput): Promise<SavedRevision> {
	await findRun(actor, input.runId, 'run.write');
	const reason = requireReason(input.reason);
	const { index, channel } = input;
	return write(async (tx) => {
		const run = await findRun(actor, input.runId, 'run.write', tx);
		await requireRunVersion(run, input.version, tx);
		const before = await currentRevision(run, tx);
		const exclusions = before.content.exclusions ?? [];
		const kept = exclusions.filter((e) => e.index !== index || e.channel !== channel);
		if (kept.length === exclusions.length) throw new AppError('wrong-state', 'This point is not excluded.');
		const saved = await addRevision(tx, actor, run, before, {
			content: { ...before.content, exclusions: kept },
			reason: `point used again: ${reason}`
		});
		await appendAudit(tx, actor, {
			type: 'run.point-restored',
			payload: { number: run.number, revision: saved.revision, index, channel },
			objectVersion: saved.revision,
			reason,
			...aboutRun(run)
		});
		return saved;
	});
}
