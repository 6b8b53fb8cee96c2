import { logSpan } from '$lib/schemas/temperature-log';
import { write } from '../database';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { findRun } from './find';
import { revise } from './revise-run';
import { currentRevision, requireReason, requireRunVersion, type SavedRevision } from './revisions';

export interface ChooseTemperatureInput {
	runId: string;
	version: number;
	/** True: later fits follow the measured log; false: the stated temperature counts. */
	useLog: boolean;
	reason: string;
}

/** Which temperature of a run counts in later fits: a new revision with a reason; fits that are there stay as they are. */
export async function chooseTemperature(actor: Actor, input: ChooseTemperatureInput): Promise<SavedRevision> {
	await findRun(actor, input.runId, 'run.write');
	const reason = requireReason(input.reason);
	return write(async (tx) => {
		const run = await findRun(actor, input.runId, 'run.write', tx);
		await requireRunVersion(run, input.version, tx);
		const { content } = await currentRevision(run, tx);
		if (!logSpan(content)) throw new AppError('wrong-state', `Run ${run.number} has no temperature log.`);
		if (content.useTemperatureLog === input.useLog)
			throw new AppError('wrong-state', 'That is what counts for this run already.');
		return revise(tx, actor, run, { content: { ...content, useTemperatureLog: input.useLog }, reason });
	});
}
