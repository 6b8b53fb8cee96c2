export type JobStatus = 'queued' | 'running' | 'done' | 'failed' | 'cancelled';

export interface JobProgress {
	/** What is being done now, in words. */
	stage: string;
	done: number;
	total: number;
	/** Best misfit so far. */
	best?: number;
}
