import { Op } from 'sequelize';
import type { Tx } from '../database';
import { Job } from '../database/models';
import { inTurn, type Served } from './turn';

interface Count {
	createdById: string;
	count: number;
}

interface Latest {
	createdById: string;
	latest: string | null;
}

/** What these people have had so far: jobs that run, and when one of theirs was last begun. */
async function servedSoFar(people: string[]): Promise<Map<string, Served>> {
	const { sequelize } = Job;
	const [running, latest] = await Promise.all([
		Job.findAll({
			where: { createdById: people, status: 'running' },
			attributes: ['createdById', [sequelize!.fn('COUNT', sequelize!.col('id')), 'count']],
			group: ['createdById'],
			raw: true
		}) as unknown as Promise<Count[]>,
		Job.findAll({
			where: { createdById: people, startedAt: { [Op.ne]: null } },
			attributes: ['createdById', [sequelize!.fn('MAX', sequelize!.col('started_at')), 'latest']],
			group: ['createdById'],
			raw: true
		}) as unknown as Promise<Latest[]>
	]);
	return new Map(
		people.map((id) => {
			const last = latest.find((l) => l.createdById === id)?.latest;
			return [
				id,
				{
					running: running.find((r) => r.createdById === id)?.count ?? 0,
					last: last ? new Date(last).getTime() : -Infinity
				}
			];
		})
	);
}

/** Ids of what waits, in the order in which it will be begun. */
export async function waitingInTurn(): Promise<string[]> {
	const waiting = await Job.findAll({
		where: { status: 'queued' },
		order: [['id', 'ASC']],
		attributes: ['id', 'createdById']
	});
	const people = [...new Set(waiting.map((job) => job.createdById))];
	const served = people.length > 1 ? await servedSoFar(people) : new Map<string, Served>();
	return inTurn(
		waiting.map((job) => ({ id: job.id, by: job.createdById })),
		served
	);
}

/** How many will be begun before this one; null where it does not wait. */
export async function aheadOf(jobId: string): Promise<number | null> {
	const place = (await waitingInTurn()).indexOf(jobId);
	return place < 0 ? null : place;
}

/** Jobs of one kind that a person has waiting or running. */
export function openJobs(kind: string, userId: string, tx?: Tx): Promise<number> {
	return Job.count({
		where: { kind, createdById: userId, status: { [Op.in]: ['queued', 'running'] } },
		transaction: tx
	});
}
