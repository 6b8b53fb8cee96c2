/** A fit that waits or runs, in words. */
import { significant } from '$lib/client/numbers';
import type { JobProgress } from '$lib/schemas/job';

/** Share of the work that is done; null where the extent is not known, so that no bar pretends to know it. */
export function shareDone(progress: JobProgress | null): number | null {
	if (!progress) return null;
	if (progress.fraction !== undefined) return progress.fraction;
	return progress.total > 0 ? progress.done / progress.total : null;
}

export function progressNote(progress: JobProgress | null): string {
	if (!progress) return 'begun';
	const best = progress.best === undefined ? '' : `, best sum of squares ${significant(progress.best, 4)}`;
	return `${progress.stage}${best}`;
}

/** @param ahead how many will be begun before it */
export function waitingWords(ahead: number | null): string {
	if (ahead === null) return 'waiting for a free worker';
	if (ahead === 0) return 'waiting, next in turn';
	return `waiting, ${ahead === 1 ? 'one fit comes' : `${ahead} fits come`} before it; people take turns`;
}
