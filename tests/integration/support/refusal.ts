import type { AppError } from '../../../src/lib/server/errors';

/** Runs what must be refused and gives the refusal, so that a test can look at its code and words. */
export async function refusal(work: () => unknown): Promise<AppError> {
	try {
		await work();
	} catch (error) {
		return error as AppError;
	}
	throw new Error('This should have been refused.');
}
