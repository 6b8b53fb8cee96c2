import type { Tx } from '../database';
import type { Job } from '../database/models';
import type { Actor } from '../policy';

/** What the queue needs to know of one kind of work. */
export interface JobKind {
	/** Worker bundled to a string. */
	source(): string;
	/** What the worker is given. */
	task(job: Job): unknown;
	/** Writes the result with its audit entry, in the transaction that marks the job as done; gives what listeners are told. */
	finish(tx: Tx, job: Job, actor: Actor, result: unknown): Promise<Record<string, unknown>>;
	/** Audit entries of the other two ends. */
	failed(tx: Tx, job: Job, actor: Actor, message: string): Promise<void>;
	cancelled(tx: Tx, job: Job, actor: Actor): Promise<void>;
}

const kinds = new Map<string, JobKind>();

export function registerKind(name: string, kind: JobKind): void {
	kinds.set(name, kind);
}

export function kindOf(name: string): JobKind {
	const kind = kinds.get(name);
	if (!kind) throw new Error(`No work of kind "${name}" is known.`);
	return kind;
}
