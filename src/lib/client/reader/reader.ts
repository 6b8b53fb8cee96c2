/**
 * The sheet reader as a page calls it: in a web worker, and on the page's own thread where a browser or a policy gives no
 * worker. A worker that dies hands over what it left unanswered.
 */
import type { Call, Reply } from './messages';
import type { Examiner, TaskName, Tasks } from './tasks';

export interface Reader {
	ask<N extends TaskName>(name: N, task: Tasks[N]['takes']): Promise<Tasks[N]['gives']>;
	close(): void;
}

/** The part of a worker that is used here. */
export type ReaderWorker = Pick<
	Worker,
	'postMessage' | 'terminate' | 'onmessage' | 'onerror' | 'onmessageerror'
>;

interface Waiting {
	call: Call;
	resolve: (value: never) => void;
	reject: (error: Error) => void;
}

/** Null where there is none to be had. */
function startWorker(): ReaderWorker | null {
	try {
		return new Worker(new URL('./reader.worker.ts', import.meta.url), {
			type: 'module',
			name: 'sheet reader'
		});
	} catch {
		return null;
	}
}

const onThisThread = async (): Promise<Examiner> => new (await import('./tasks')).Examiner();

/** What was typed is drawn before the thread is taken. */
const afterDrawing = (): Promise<void> => new Promise((go) => setTimeout(go));

export function startReader(start: () => ReaderWorker | null = startWorker): Reader {
	const waiting = new Map<number, Waiting>();
	let calls = 0;
	let worker = start();
	let opening: Call | null = null;
	let here: Promise<Examiner> | null = null;
	let closed = false;

	function finish(reply: Reply): void {
		const one = waiting.get(reply.id);
		waiting.delete(reply.id);
		if (!one) return;
		if ('failed' in reply) one.reject(new Error(reply.failed));
		else one.resolve(reply.value as never);
	}

	/** Calls one after the other, as a worker would take them. */
	function performHere(call: Call): void {
		const before = here ?? onThisThread();
		here = before.then(async (examiner) => {
			await afterDrawing();
			if (closed) return examiner;
			try {
				finish({ id: call.id, value: examiner.perform(call.name, call.task) });
			} catch (caught) {
				finish({ id: call.id, failed: caught instanceof Error ? caught.message : String(caught) });
			}
			return examiner;
		});
	}

	function takeOver(): void {
		if (!worker || closed) return;
		worker.terminate();
		worker = null;
		const left = [...waiting.values()].map((one) => one.call);
		// The sheet itself has to be opened once more, whether or not the worker got that far.
		if (opening && !left.includes(opening)) left.unshift(opening);
		left.forEach(performHere);
	}

	if (worker) {
		worker.onmessage = ({ data }: MessageEvent<Reply>) => finish(data);
		worker.onerror = takeOver;
		worker.onmessageerror = takeOver;
	}

	return {
		ask: (name, task) =>
			new Promise((resolve, reject) => {
				const call: Call = { id: ++calls, name, task };
				if (name === 'open') opening = call;
				waiting.set(call.id, { call, resolve, reject });
				if (worker) worker.postMessage(call);
				else performHere(call);
			}),
		close: () => {
			closed = true;
			worker?.terminate();
			waiting.clear();
		}
	};
}
