import { parentPort, workerData } from 'node:worker_threads';
import type { ThreadMessage } from './thread';

export interface WorkerHooks {
	/** Tells how far the work is; thinned out, so that a tight loop may call it as it likes. */
	progress: (progress: unknown) => void;
	/** Whether the work was called off. */
	cancelled: () => boolean;
}

/** The work says that its input cannot be computed, in words for the person, with the fields that it concerns. */
export class Refused extends Error {
	constructor(
		message: string,
		readonly fields: { field: string; message: string }[] = []
	) {
		super(message);
	}
}

/** Problems of the input go home as such; everything else is a fault of ours and crashes the thread. */
function asRefusal(caught: unknown): ThreadMessage | null {
	if (caught instanceof Refused)
		return { type: 'refused', message: caught.message, code: 'input', fields: caught.fields };
	if (!(caught instanceof Error)) return null;
	const isUnit = (caught as { code?: unknown }).code === 'unit-invalid';
	return isUnit || caught instanceof RangeError
		? { type: 'refused', message: caught.message, code: 'input' }
		: null;
}

const PROGRESS_EVERY_MS = 100;

/** The frame of every worker: reads the task, runs the work, sends the result or the refusal home. */
export function serveTask<T, R>(work: (task: T, hooks: WorkerHooks) => R | Promise<R>): void {
	const { task, stop } = workerData as { task: T; stop: SharedArrayBuffer };
	const flag = new Int32Array(stop);
	const send = (message: ThreadMessage) => parentPort?.postMessage(message);
	let last = -Infinity;
	const hooks: WorkerHooks = {
		cancelled: () => Atomics.load(flag, 0) === 1,
		progress(progress) {
			const now = performance.now();
			if (now - last < PROGRESS_EVERY_MS) return;
			last = now;
			send({ type: 'progress', progress });
		}
	};
	void (async () => {
		try {
			send({ type: 'result', result: await work(task, hooks) });
		} catch (caught) {
			if (hooks.cancelled()) return send({ type: 'refused', message: 'called off', code: 'cancelled' });
			const refusal = asRefusal(caught);
			if (!refusal) throw caught;
			send(refusal);
		}
	})();
}
