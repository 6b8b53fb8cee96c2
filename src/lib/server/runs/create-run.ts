import { runContent, type RunContent } from '$lib/schemas/run';
import { appendAudit } from '../audit/append';
import { contentHash } from '../audit/canonical';
import type { Tx } from '../database';
import { Run, RunRevision, type Study } from '../database/models';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { aboutRun } from './revisions';

export interface NewRun {
	name: string;
	content: RunContent;
	sheetId: string | null;
	tableKey: string | null;
	/** What the person decided while the sheet was read. */
	answers: unknown;
}

export function runName(name: string, number: number): string {
	const text = name.trim() || `Run ${number}`;
	if (text.length <= 120) return text;
	const message = 'The name of a run has at most 120 letters.';
	throw new AppError('invalid', message, { fields: [{ field: 'name', message }] });
}

/** The rows of a new run and of its first revision, with the audit entry. */
export async function addRun(
	tx: Tx,
	actor: Actor,
	study: Study,
	input: NewRun
): Promise<{ run: Run; revision: RunRevision }> {
	const last = await Run.max<number | null, Run>('number', { where: { studyId: study.id }, transaction: tx });
	const number = (last ?? 0) + 1;
	const content = runContent.parse(input.content);
	const run = await Run.create(
		{
			studyId: study.id,
			groupId: study.groupId,
			number,
			name: runName(input.name, number),
			createdById: actor.userId,
			updatedAt: new Date()
		},
		{ transaction: tx }
	);
	const revision = await RunRevision.create(
		{
			runId: run.id,
			number: 1,
			sheetId: input.sheetId,
			tableKey: input.tableKey,
			content,
			contentHash: contentHash(content),
			createdById: actor.userId
		},
		{ transaction: tx }
	);
	await run.update({ currentRevisionId: revision.id }, { transaction: tx });
	await appendAudit(tx, actor, {
		type: 'run.created',
		payload: {
			number,
			name: run.name,
			sheetId: input.sheetId,
			contentHash: revision.contentHash,
			answers: input.answers
		},
		objectVersion: 1,
		...aboutRun(run)
	});
	return { run, revision };
}
