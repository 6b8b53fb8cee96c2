import { findFitJob } from '../fits/read-fit';
import type { Actor } from '../policy';
import { listWindows, type WindowSummary } from './list-windows';

/** Windows that rest on one fit. */
export async function windowsOfFit(actor: Actor, fitId: string): Promise<WindowSummary[]> {
	const job = await findFitJob(actor, fitId, 'study.read');
	const windows = await listWindows(actor, job.studyId!);
	return windows.filter((window) => window.fitId === job.id);
}
