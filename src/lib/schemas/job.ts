export type JobStatus = 'queued' | 'running' | 'done' | 'failed' | 'cancelled';

export interface JobProgress {
	/** What is being done now, in words. */
	stage: string;
	done: number;
	total: number;
	/** Share of the whole work, 0 to 1, where it is known better than done of total. */
	fraction?: number;
	/** Best misfit so far. */
	best?: number;
}
