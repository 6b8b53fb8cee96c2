/** A finding that stands in the way of a fit. */
import type { FitFinding } from '../../schemas/fit';

export const stop = (code: string, message: string, parameters: string[] = []): FitFinding => ({
	code,
	level: 'stop',
	message,
	...(parameters.length ? { parameters } : {})
});
