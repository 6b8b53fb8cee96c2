/** Follows a job by its Server-Sent Events; the browser comes back by itself with the number of the last event it saw. */
import type { JobProgress, JobStatus } from '$lib/schemas/job';

const ENDED: readonly JobStatus[] = ['done', 'failed', 'cancelled'];

export class JobFollower {
	progress = $state.raw<JobProgress | null>(null);
	status = $state<JobStatus>('queued');
	private source: EventSource | null = null;

	constructor(
		private readonly url: string,
		private readonly onend: (status: JobStatus) => void
	) {}

	start(): void {
		this.source = new EventSource(this.url);
		this.source.addEventListener('running', () => (this.status = 'running'));
		this.source.addEventListener('progress', (event) => {
			this.status = 'running';
			this.progress = JSON.parse((event as MessageEvent<string>).data) as JobProgress;
		});
		for (const end of ENDED) this.source.addEventListener(end, () => this.finish(end));
	}

	stop(): void {
		this.source?.close();
		this.source = null;
	}

	private finish(status: JobStatus): void {
		this.status = status;
		this.stop();
		this.onend(status);
	}
}
