/** Saves a draft by itself: a moment after the last change, one save at a time, again after a failure. */
export type SaveOutcome<Conflict> =
	| { kind: 'saved'; version: number }
	| { kind: 'conflict'; theirs: Conflict }
	/** `again`: worth another try (the network, a busy service); else only a change can help. */
	| { kind: 'failed'; message: string; again: boolean };

export interface AutosaveOptions<T, Conflict> {
	version: number;
	save: (content: T, version: number) => Promise<SaveOutcome<Conflict>>;
	onstatus: (status: 'waiting' | 'saving' | 'saved' | 'failed' | 'conflict', message?: string) => void;
	onconflict: (theirs: Conflict) => void;
	delayMs?: number;
	retryMs?: readonly number[];
}

const RETRY_MS = [2_000, 4_000, 8_000, 15_000, 30_000] as const;

export class Autosave<T, Conflict = unknown> {
	private pending: { content: T } | null = null;
	private timer: ReturnType<typeof setTimeout> | undefined;
	private running: Promise<void> | null = null;
	private failures = 0;
	private stopped = false;
	version: number;

	constructor(private readonly options: AutosaveOptions<T, Conflict>) {
		this.version = options.version;
	}

	/** True while something is not on the server yet. */
	get dirty(): boolean {
		return this.pending !== null || this.running !== null;
	}

	queue(content: T): void {
		this.pending = { content };
		if (this.stopped) return;
		if (!this.running) this.options.onstatus('waiting');
		this.arm(this.options.delayMs ?? 800);
	}

	/** Saves what waits, now. */
	async flush(): Promise<void> {
		clearTimeout(this.timer);
		if (this.running) await this.running;
		if (this.pending && !this.stopped) await this.start();
	}

	/** After a conflict: goes on from their version. */
	resume(version: number): void {
		this.version = version;
		this.stopped = false;
		this.failures = 0;
	}

	/** Drops what waits (the person took the other side). */
	discard(): void {
		clearTimeout(this.timer);
		this.pending = null;
	}

	private arm(ms: number): void {
		clearTimeout(this.timer);
		this.timer = setTimeout(() => {
			if (!this.running) void this.start();
		}, ms);
	}

	private start(): Promise<void> {
		this.running = this.run().finally(() => (this.running = null));
		return this.running.then(() => {
			// What was changed while saving goes next.
			if (this.pending && !this.stopped && this.failures === 0) this.arm(this.options.delayMs ?? 800);
		});
	}

	private async run(): Promise<void> {
		const taken = this.pending;
		if (!taken) return;
		this.pending = null;
		this.options.onstatus('saving');
		const outcome = await this.attempt(taken.content);
		if (outcome.kind === 'saved') {
			this.version = outcome.version;
			this.failures = 0;
			this.options.onstatus(this.pending ? 'waiting' : 'saved');
			return;
		}
		// A newer change stands; else the one that was not saved still waits.
		this.pending ??= taken;
		if (outcome.kind === 'conflict') {
			this.stopped = true;
			this.options.onstatus('conflict');
			this.options.onconflict(outcome.theirs);
			return;
		}
		const waits = this.options.retryMs ?? RETRY_MS;
		const wait = waits[Math.min(this.failures, waits.length - 1)];
		this.failures++;
		this.options.onstatus('failed', outcome.message);
		if (outcome.again) this.arm(wait);
	}

	private async attempt(content: T): Promise<SaveOutcome<Conflict>> {
		try {
			return await this.options.save(content, this.version);
		} catch {
			return { kind: 'failed', message: 'no connection to the service, trying again', again: true };
		}
	}
}
