import type { FirstFormInput } from '$lib/kinetics/window';
import { firstFormRequest, type FirstFormRequestInput, type FirstFormResult } from '$lib/schemas/window';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { Fit, WindowResult } from '../database/models';
import { AppError } from '../errors';
import { findFitJob } from '../fits/read-fit';
import { callEngine } from '../jobs/engine-calls';
import type { Actor } from '../policy';
import source from './window.worker.ts?nodeworker';

const LONGEST_MS = 120_000;

export interface ComputeWindowInput {
	fitId: string;
	input: FirstFormRequestInput;
}

/** What the engine needs of a recorded fit. A fit that did not converge carries no window. */
async function usableFit(fitId: string): Promise<Fit> {
	const fit = await Fit.findByPk(fitId);
	if (!fit) throw new AppError('wrong-state', 'This fit has no result: a window needs a fit that is done.');
	if (fit.report.status !== 'converged')
		throw new AppError(
			'wrong-state',
			`Fit ${fit.number} ended "${fit.report.status}": no window can rest on it.`
		);
	return fit;
}

function engineInput(fit: Fit, request: FirstFormInput['request']): FirstFormInput {
	const { species, steps, referenceTemperature, options } = fit.request;
	return {
		scheme: { species, steps, referenceTemperature },
		fit: fit.report,
		tied: options.tied,
		request
	};
}

/** Computes a window from a recorded fit and keeps it with its input; it is never changed afterwards. */
export async function computeWindow(
	actor: Actor,
	{ fitId, input }: ComputeWindowInput
): Promise<{ id: string; number: number }> {
	const job = await findFitJob(actor, fitId, 'window.run');
	const request = firstFormRequest.parse(input);
	const fit = await usableFit(job.id);
	const result = await callEngine<FirstFormResult>({
		source,
		task: engineInput(fit, request),
		longestMs: LONGEST_MS
	});
	return write(async (tx) => {
		const last = await WindowResult.max<number | null, WindowResult>('number', {
			where: { studyId: fit.studyId },
			transaction: tx
		});
		const number = (last ?? 0) + 1;
		const { kind, engineVersion, seed } = result;
		const row = await WindowResult.create(
			{
				studyId: fit.studyId,
				groupId: fit.groupId,
				fitId: fit.id,
				number,
				kind,
				input: request,
				result,
				engineVersion,
				seed,
				createdById: actor.userId
			},
			{ transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'window.computed',
			payload: { number, kind, engineVersion, seed },
			groupId: fit.groupId,
			studyId: fit.studyId,
			objectType: 'window',
			objectId: row.id,
			objectVersion: number
		});
		return { id: row.id, number };
	});
}
