import type { SamplingPlan } from '$lib/kinetics/fit';
import type { SamplePlanRequest } from '$lib/schemas/fit-plan';
import { limitEngineCalls } from '../api/limit';
import { AppError } from '../errors';
import { analyseInThread } from '../fits/analyse-fit';
import { schemeIssues } from '../fits/plan-fit';
import type { Actor } from '../policy';
import { requireEngineScope } from './scope';

/** Plans the samples of a run before anything was measured: from a scheme with guessed constants. Nothing is kept. */
export async function planSamplesDirectly(
	actor: Actor,
	request: SamplePlanRequest,
	signal?: AbortSignal
): Promise<SamplingPlan> {
	requireEngineScope(actor, ['read', 'fit']);
	await limitEngineCalls(actor);
	const stops = schemeIssues(request).filter((issue) => issue.level === 'stop');
	if (stops.length)
		throw new AppError('invalid', stops.map((s) => s.message).join(' '), {
			fields: stops.map(({ message }) => ({ field: 'steps', message }))
		});
	return analyseInThread<SamplingPlan>({ kind: 'sampling', request }, signal);
}
