import type { SolveAnswer, SolveRequest } from '$lib/schemas/solve';
import { limitEngineCalls } from '../api/limit';
import { AppError } from '../errors';
import { callEngine } from '../jobs/engine-calls';
import type { Actor } from '../policy';
import { requireEngineScope } from './scope';
import { solveBatch, SolveRefused } from './solve-batch';
import source from './solve.worker.ts?nodeworker';

/** Up to here a batch is solved in a few milliseconds, which starting a thread would cost as well. */
const SMALL = { species: 12, times: 1000 };

const isSmall = (request: SolveRequest): boolean =>
	request.species.length <= SMALL.species && request.times.length <= SMALL.times;

/** Solves a batch and keeps nothing. */
export async function solveDirectly(
	actor: Actor,
	request: SolveRequest,
	signal?: AbortSignal
): Promise<SolveAnswer> {
	requireEngineScope(actor, ['read', 'fit']);
	await limitEngineCalls(actor);
	if (!isSmall(request)) return callEngine<SolveAnswer>({ source, task: request, signal });
	try {
		return solveBatch(request);
	} catch (caught) {
		if (caught instanceof SolveRefused)
			throw new AppError('invalid', caught.message, { fields: caught.fields });
		if (caught instanceof RangeError) throw new AppError('invalid', caught.message);
		throw caught;
	}
}
