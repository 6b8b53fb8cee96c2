import { Worker } from 'node:worker_threads';

/** What a worker thread sends home. */
export type ThreadMessage =
	| { type: 'progress'; progress: unknown }
	| { type: 'result'; result: unknown }
	| { type: 'refused'; message: string; code?: string; fields?: { field: string; message: string }[] };

/** The work was called off before it had a result. */
export class ThreadCancelled extends Error {
	override name = 'ThreadCancelled';
}
/** The work itself says that its input cannot be computed, in words for the person. */
export class ThreadRefused extends Error {
	override name = 'ThreadRefused';
	constructor(
		message: string,
		readonly code?: string,
		readonly fields: { field: string; message: string }[] = []
	) {
		super(message);
	}
}

export interface ThreadOptions {
	/** The worker bundled to one string, see `?nodeworker`. */
	source: string;
	task: unknown;
	onProgress?: (progress: unknown) => void;
	heapMb?: number;
}

export interface Thread<R> {
	result: Promise<R>;
	/**
	 * Calls the work off: `result` is refused at once, and the thread is ended whatever it is busy with. A result that is on
	 * its way is dropped.
	 */
	cancel(): void;
	/** The thread has ended and its memory is free; comes after `result`, however that went. */
	gone: Promise<void>;
}

function refusal(message: ThreadMessage & { type: 'refused' }): ThreadRefused {
	return new ThreadRefused(message.message, message.code, message.fields);
}

function crash(error: NodeJS.ErrnoException): Error {
	if (error.code !== 'ERR_WORKER_OUT_OF_MEMORY') return error;
	return new ThreadRefused(
		'This needs more memory than one computation may take. Use fewer runs or points.',
		'too-large'
	);
}

/**
 * Runs one task in a thread of its own. The worker gets `{task, stop}`: `stop` is shared memory whose first number
 * turns 1 when the work is called off, so that even a busy loop can see it.
 */
export function startThread<R>(options: ThreadOptions): Thread<R> {
	const { source, task, onProgress, heapMb = 768 } = options;
	const stop = new SharedArrayBuffer(4);
	const worker = new Worker(source, {
		eval: true,
		workerData: { task, stop },
		resourceLimits: { maxOldGenerationSizeMb: heapMb }
	});
	let cancelled = false;
	let callOff: () => void;
	const result = new Promise<R>((resolve, reject) => {
		callOff = () => reject(new ThreadCancelled());
		worker.on('message', (message: ThreadMessage) => {
			if (cancelled) return;
			if (message.type === 'progress') return onProgress?.(message.progress);
			if (message.type === 'result') resolve(message.result as R);
			else reject(refusal(message));
			void worker.terminate();
		});
		worker.once('error', (error) => reject(crash(error)));
		// Settled long before in the ordinary case: this speaks only when the thread ended without a word.
		worker.once('exit', (code) => reject(new Error(`The worker ended with code ${code}.`)));
	});
	const gone = new Promise<void>((resolve) => worker.once('exit', () => resolve()));
	const cancel = (): void => {
		if (cancelled) return;
		cancelled = true;
		// Nobody waits for the thread: one that is deep in a matrix would not look at its flag for a while.
		callOff();
		Atomics.store(new Int32Array(stop), 0, 1);
		void worker.terminate();
	};
	return { result, cancel, gone };
}
