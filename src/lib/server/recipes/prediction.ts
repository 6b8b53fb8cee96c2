import { confirmationRun } from '$lib/kinetics/fit';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import type { RunContent } from '$lib/schemas/run';
import { AppError } from '../errors';

export interface BandCount {
	inside: number;
	/** Values counted; a value given as a limit is not. */
	total: number;
	level: number;
}

/** The engine's count of the values of an unused run inside the 95 % prediction band. */
export function countInBand(request: FitRequest, report: FitReport, run: RunContent): BandCount {
	try {
		const { inside, counted, confidence } = confirmationRun(report, request, run, 0.95);
		if (counted === 0)
			throw new RangeError('The run has no value after time zero that could be held against the curves.');
		return { inside, total: counted, level: confidence };
	} catch (caught) {
		if (!(caught instanceof RangeError)) throw caught;
		throw new AppError('invalid', `The run cannot be held against the fit: ${caught.message}`);
	}
}
