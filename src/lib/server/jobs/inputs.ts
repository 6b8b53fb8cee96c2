import type { Tx } from '../database';
import { JobInput, type Job } from '../database/models';

/** Reads what these jobs compute, which is kept apart from their state, and puts it on them. */
export async function withInputs(jobs: Job[], tx?: Tx): Promise<Job[]> {
	const rows = await JobInput.findAll({ where: { jobId: jobs.map((j) => j.id) }, transaction: tx });
	const of = new Map(rows.map((row) => [row.jobId, row.input]));
	for (const job of jobs) job.input = of.get(job.id);
	return jobs;
}

export async function withInput<J extends Job | null>(job: J, tx?: Tx): Promise<J> {
	if (job) await withInputs([job], tx);
	return job;
}
