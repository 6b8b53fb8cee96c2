import { runContent, type RunContent } from '$lib/schemas/run';
import { appendAudit } from '../audit/append';
import { contentHash } from '../audit/canonical';
import { write, type Tx } from '../database';
import type { Run } from '../database/models';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { runDifferences } from './differences';
import { findRun } from './find';
import {
	aboutRun,
	addRevision,
	currentRevision,
	requireReason,
	requireRunVersion,
	type NewRevision,
	type SavedRevision
} from './revisions';

export interface ReviseRunInput {
	runId: string;
	version: number;
	content: RunContent;
	reason: string;
}

/** The audit entry names at most this many values; the revisions themselves hold all. */
const LISTED = 200;

/** A revision with its audit entry, for whoever has checked that it may be made. */
export async function revise(tx: Tx, actor: Actor, run: Run, next: NewRevision): Promise<SavedRevision> {
	const before = await currentRevision(run, tx);
	const saved = await addRevision(tx, actor, run, before, next);
	await appendAudit(tx, actor, {
		type: 'run.revised',
		payload: {
			number: run.number,
			revision: saved.revision,
			contentHash: saved.contentHash,
			changes: runDifferences(before.content, next.content).slice(0, LISTED)
		},
		objectVersion: saved.revision,
		reason: next.reason,
		...aboutRun(run)
	});
	return saved;
}

/** Changes conditions or values of a run as a new revision with a reason; the sheet as received stays untouched. */
export async function reviseRun(actor: Actor, input: ReviseRunInput): Promise<SavedRevision> {
	await findRun(actor, input.runId, 'run.write');
	const reason = requireReason(input.reason);
	const content = runContent.parse(input.content);
	return write(async (tx) => {
		const run = await findRun(actor, input.runId, 'run.write', tx);
		await requireRunVersion(run, input.version, tx);
		const before = await currentRevision(run, tx);
		if (before.contentHash === contentHash(content))
			throw new AppError('invalid', 'Nothing differs from the revision that is there.');
		return revise(tx, actor, run, { content, reason });
	});
}
