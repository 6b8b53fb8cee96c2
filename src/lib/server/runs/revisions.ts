import { runContent, type RunContent } from '$lib/schemas/run';
import { contentHash } from '../audit/canonical';
import type { Tx } from '../database';
import { Run, RunRevision } from '../database/models';
import { AppError, versionChanged } from '../errors';
import type { Actor } from '../policy';

export interface NewRevision {
	content: RunContent;
	reason: string;
	sheetId?: string | null;
	tableKey?: string | null;
}

export interface SavedRevision {
	version: number;
	revision: number;
	revisionId: string;
	contentHash: string;
}

/** A reason that a later reader can use. "." and the like are refused. */
export function requireReason(reason: string): string {
	const text = reason.trim();
	if ((text.match(/\p{L}/gu) ?? []).length >= 5 && text.length <= 500) return text;
	const message = 'Say why in at least five letters (and at most 500).';
	throw new AppError('invalid', message, { fields: [{ field: 'reason', message }] });
}

export async function currentRevision(run: Run, tx?: Tx): Promise<RunRevision> {
	const revision = await RunRevision.findByPk(run.currentRevisionId ?? '', { transaction: tx });
	if (!revision) throw new Error(`Run ${run.id} has no revision.`);
	return revision;
}

/** A run as the page must see it again when somebody else was quicker. */
async function stale(run: Run, tx: Tx): Promise<AppError> {
	const revision = await currentRevision(run, tx);
	return versionChanged({ version: run.version, revision: revision.number, content: revision.content });
}

export async function requireRunVersion(run: Run, version: number, tx: Tx): Promise<void> {
	if (run.version !== version) throw await stale(run, tx);
}

/** Adds a revision and makes it the run's current one. The revisions before it stay as they were. */
export async function addRevision(
	tx: Tx,
	actor: Actor,
	run: Run,
	before: RunRevision,
	next: NewRevision
): Promise<SavedRevision> {
	const content = runContent.parse(next.content);
	const revision = await RunRevision.create(
		{
			runId: run.id,
			number: before.number + 1,
			sheetId: next.sheetId === undefined ? before.sheetId : next.sheetId,
			tableKey: next.tableKey === undefined ? before.tableKey : next.tableKey,
			content,
			contentHash: contentHash(content),
			reason: next.reason,
			createdById: actor.userId
		},
		{ transaction: tx }
	);
	const [count] = await Run.update(
		{ currentRevisionId: revision.id, version: run.version + 1, updatedAt: new Date() },
		{ where: { id: run.id, version: run.version }, transaction: tx }
	);
	if (count !== 1) throw await stale(run, tx);
	return {
		version: run.version + 1,
		revision: revision.number,
		revisionId: revision.id,
		contentHash: revision.contentHash
	};
}

export const aboutRun = (run: Run) => ({
	groupId: run.groupId,
	studyId: run.studyId,
	objectType: 'run',
	objectId: run.id
});
