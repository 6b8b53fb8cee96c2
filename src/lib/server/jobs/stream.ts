import { eventsAfter, isEnd, listen, type NumberedEvent } from './events';

const KEEP_ALIVE_MS = 15_000;
const open = new Set<() => void>();

const frame = (event: NumberedEvent): string =>
	`id: ${event.seq}\nevent: ${event.type}\ndata: ${JSON.stringify(event.data)}\n\n`;

/** Sends what was missed, then what happens, each event once and in order; ends with the job. */
class Follower {
	private sent: number;
	private waiting: NumberedEvent[] | null = [];
	private readonly stopListening: () => void;
	private readonly timer: NodeJS.Timeout;
	private readonly encoder = new TextEncoder();
	private closed = false;

	constructor(
		private readonly controller: ReadableStreamDefaultController<Uint8Array>,
		private readonly jobId: string,
		after: number
	) {
		this.sent = after;
		this.stopListening = listen(jobId, (event) => this.take(event));
		this.timer = setInterval(() => this.write(': still here\n\n'), KEEP_ALIVE_MS);
		open.add(this.close);
	}

	/** Live events wait until the missed ones are out. */
	async catchUp(): Promise<void> {
		this.write('retry: 2000\n\n');
		for (const event of await eventsAfter(this.jobId, this.sent)) this.send(event);
		const live = this.waiting ?? [];
		this.waiting = null;
		for (const event of live) this.send(event);
	}

	private take(event: NumberedEvent): void {
		if (this.waiting) this.waiting.push(event);
		else this.send(event);
	}

	private send(event: NumberedEvent): void {
		if (this.closed || event.seq <= this.sent) return;
		this.sent = event.seq;
		this.write(frame(event));
		if (isEnd(event.type)) this.close();
	}

	private write(text: string): void {
		if (!this.closed) this.controller.enqueue(this.encoder.encode(text));
	}

	/** The reader went away by itself. */
	readonly abandon = (): void => {
		this.closed = true;
		clearInterval(this.timer);
		this.stopListening();
		open.delete(this.close);
	};

	readonly close = (): void => {
		if (this.closed) return;
		this.abandon();
		this.controller.close();
	};
}

/**
 * The events of a job as Server-Sent Events. A reader that comes back with the number of the last event it saw
 * (Last-Event-ID) gets only the later ones; when there can be none, 204 tells its browser not to ask again.
 */
export async function eventStream(jobId: string, ended: boolean, lastEventId: number): Promise<Response> {
	if (ended && (await eventsAfter(jobId, lastEventId)).length === 0)
		return new Response(null, { status: 204 });
	let follower: Follower | undefined;
	const body = new ReadableStream<Uint8Array>({
		async start(controller) {
			follower = new Follower(controller, jobId, lastEventId);
			try {
				await follower.catchUp();
			} catch (caught) {
				follower.close();
				throw caught;
			}
		},
		cancel: () => follower?.abandon()
	});
	return new Response(body, {
		headers: {
			'content-type': 'text/event-stream; charset=utf-8',
			'cache-control': 'no-store',
			'x-accel-buffering': 'no'
		}
	});
}

/** An open stream would hold up the service's stopping: readers come back by themselves when it is up again. */
export function closeStreams(): void {
	for (const close of [...open]) close();
}
