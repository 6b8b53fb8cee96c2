import { exclusionSchema, type ExclusionContent, type RunContent } from '$lib/schemas/run';
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

export interface ExcludePointInput {
	runId: string;
	version: number;
	/** Place of the row among the run's timepoints, from 0. */
	index: number;
	/** Which value of the row; null: the whole row. */
	channel: string | null;
	reasonCode: ExclusionContent['reasonCode'];
	reason: string;
}

function requirePoint(content: RunContent, index: number, channel: string | null): void {
	const point = content.timepoints[index];
	const known = channel === null || content.channels.some((c) => c.id === channel);
	if (point && known) return;
	const field = point ? 'channel' : 'index';
	const message = point
		? `This run has no column ${String(channel)}.`
		: `This run has ${content.timepoints.length} rows; there is no row ${index + 1}.`;
	throw new AppError('invalid', message, { fields: [{ field, message }] });
}

/** Leaves a point out of every later fit, with the reason. It stays visible, and fits that used it stay as they are. */
export async function excludePoint(actor: Actor, input: ExcludePointInput): Promise<SavedRevision> {
	await findRun(actor, input.runId, 'run.write');
	const reason = requireReason(input.reason);
	const { index, channel, reasonCode } = input;
	const exclusion = exclusionSchema.parse({
		index,
		channel,
		reasonCode,
		reason,
		by: actor.name,
		at: new Date().toISOString()
	});
	return write(async (tx) => {
		const run = await findRun(actor, input.runId, 'run.write', tx);
		await requireRunVersion(run, input.version, tx);
		const before = await currentRevision(run, tx);
		requirePoint(before.content, index, channel);
		const exclusions = before.content.exclusions ?? [];
		if (exclusions.some((e) => e.index === index && (e.channel === null || e.channel === channel)))
			throw new AppError('wrong-state', 'This point is excluded already.');
		// A whole row takes the place of exclusions of its single values.
		const kept = channel === null ? exclusions.filter((e) => e.index !== index) : exclusions;
		const saved = await addRevision(tx, actor, run, before, {
			content: { ...before.content, exclusions: [...kept, exclusion] },
			reason: `${reasonCode}: ${reason}`
		});
		await appendAudit(tx, actor, {
			type: 'run.point-excluded',
			payload: { number: run.number, revision: saved.revision, index, channel, reasonCode },
			objectVersion: saved.revision,
			reason,
			...aboutRun(run)
		});
		return saved;
	});
}
