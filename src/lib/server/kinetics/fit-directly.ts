import type { FitReport, FitRequest } from '$lib/schemas/fit';
import { limitEngineCalls } from '../api/limit';
import { AppError } from '../errors';
import { schemeIssues } from '../fits/plan-fit';
import { fitWorker } from '../fits/worker-source';
import { callEngine } from '../jobs/engine-calls';
import type { Actor } from '../policy';
import { requireEngineScope } from './scope';

const MOST_POINTS = 2000;

/** Values that count, whatever their kind. */
export function pointsOf(request: FitRequest): number {
	return request.runs.reduce(
		(sum, run) =>
			sum +
			run.timepoints.reduce(
				(n, point) =>
					n + run.channels.filter((channel) => (point.values[channel.id] ?? null) !== null).length,
				0
			),
		0
	);
}

/** Fits a small problem and keeps nothing; a larger one belongs to a study, as a recorded fit. */
export async function fitDirectly(
	actor: Actor,
	request: FitRequest,
	signal?: AbortSignal
): Promise<FitReport> {
	requireEngineScope(actor, ['fit']);
	const points = pointsOf(request);
	if (points > MOST_POINTS)
		throw new AppError(
			'too-large',
			`This call fits at most ${MOST_POINTS} points; these runs have ${points}. Use a recorded fit: POST /api/v1/studies/{id}/fits.`
		);
	await limitEngineCalls(actor);
	const stops = schemeIssues(request).filter((issue) => issue.level === 'stop');
	if (stops.length)
		throw new AppError('invalid', stops.map((s) => s.message).join(' '), {
			fields: stops.map(({ message }) => ({ field: 'steps', message }))
		});
	return callEngine<FitReport>({ source: fitWorker(), task: request, signal });
}
