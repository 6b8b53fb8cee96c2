import { EventEmitter } from 'node:events';
import { Op } from 'sequelize';
import type { JobStatus } from '$lib/schemas/job';
import type { Tx } from '../database';
import { JobEvent } from '../database/models';

export interface NumberedEvent {
	seq: number;
	type: string;
	data: unknown;
}

export const ENDED: readonly JobStatus[] = ['done', 'failed', 'cancelled'];
export const isEnd = (type: string): boolean => (ENDED as readonly string[]).includes(type);

const emitter = new EventEmitter().setMaxListeners(0);

/** The next numbered event of a job, written with the change that it tells of. Tell listeners after the commit. */
export async function addEvent(tx: Tx, jobId: string, type: string, data: unknown): Promise<NumberedEvent> {
	const last = await JobEvent.max<number | null, JobEvent>('seq', { where: { jobId }, transaction: tx });
	const event = { seq: (last ?? 0) + 1, type, data };
	await JobEvent.create({ jobId, ...event }, { transaction: tx });
	return event;
}

export function tellListeners(jobId: string, event: NumberedEvent): void {
	emitter.emit(jobId, event);
}

export function listen(jobId: string, listener: (event: NumberedEvent) => void): () => void {
	emitter.on(jobId, listener);
	return () => emitter.off(jobId, listener);
}

export async function eventsAfter(jobId: string, seq: number): Promise<NumberedEvent[]> {
	const rows = await JobEvent.findAll({
		where: { jobId, seq: { [Op.gt]: seq } },
		order: [['seq', 'ASC']]
	});
	return rows.map(({ seq: number, type, data }) => ({ seq: number, type, data }));
}
