import { AppError } from '../errors';
import { settings } from '../settings';
import { startThread, ThreadCancelled, ThreadRefused, type Thread } from './thread';

/** Computations that a person waits for: bounded in time, in number at once and in number waiting. */
const LONGEST_MS = 30_000;
const MOST_WAITING = 64;
/** One that takes seconds must not hold up a sheet that is being read. */
const FEWEST_AT_ONCE = 2;

const active = new Set<Thread<unknown>>();
const waiting: (() => void)[] = [];
let taken = 0;

async function takeSlot(): Promise<void> {
	if (taken < Math.max(FEWEST_AT_ONCE, settings().FIT_WORKERS)) {
		taken++;
		return;
	}
	if (waiting.length >= MOST_WAITING)
		throw new AppError('unavailable', 'Too many computations are waiting. Try again in half a minute.', {
			data: { retryAfterS: 30 }
		});
	// Whoever is done hands the slot over without giving it back, so that nobody slips in between.
	await new Promise<void>((resolve) => waiting.push(resolve));
}

function giveSlot(): void {
	const next = waiting.shift();
	if (next) next();
	else taken--;
}

export interface EngineCall {
	source: string;
	task: unknown;
	/** The request: when its reader goes away, the work is called off. */
	signal?: AbortSignal;
	longestMs?: number;
}

function asAppError(caught: unknown, timedOut: boolean): unknown {
	if (timedOut)
		return new AppError(
			'too-large',
			'This computation takes longer than a direct call may. Start it as a recorded fit of a study.'
		);
	if (caught instanceof ThreadCancelled)
		return new AppError('unavailable', 'The computation was called off.');
	if (caught instanceof ThreadRefused)
		return new AppError('invalid', caught.message, { fields: caught.fields });
	return caught;
}

/** Runs one bounded computation in a thread and gives its result; refusals of the engine become the person's errors. */
export async function callEngine<R>(call: EngineCall): Promise<R> {
	await takeSlot();
	let thread: Thread<R> | undefined;
	let timedOut = false;
	const cancel = (): void => thread?.cancel();
	const timer = setTimeout(() => {
		timedOut = true;
		cancel();
	}, call.longestMs ?? LONGEST_MS);
	try {
		if (call.signal?.aborted) throw new ThreadCancelled();
		thread = startThread<R>({ source: call.source, task: call.task });
		active.add(thread);
		call.signal?.addEventListener('abort', cancel, { once: true });
		return await thread.result;
	} catch (caught) {
		throw asAppError(caught, timedOut);
	} finally {
		clearTimeout(timer);
		call.signal?.removeEventListener('abort', cancel);
		// The slot is taken until the thread is gone: else called-off work would pile up behind the limit.
		if (thread) void thread.gone.then(() => release(thread!));
		else giveSlot();
	}
}

function release(thread: Thread<unknown>): void {
	active.delete(thread);
	giveSlot();
}

export function stopEngine(): void {
	for (const thread of active) thread.cancel();
}
